// Runs a designed instrument: every string a loop, every bridge a junction, exact at every sample.
#pragma once

#include "dsp/design/InstrumentDesign.h"

#include <memory>

namespace hitchpin::engine {

/// One release of a string that a plectrum or a finger held aside.
struct Pluck {
    double force = 1.0;       ///< N, held just before the release
    double pointRatio = 0.2;  ///< of the speaking length, from the bridge, 0…1. Partials with a node there stay away
                              ///< where it is the ratio designed for; elsewhere a stiff string follows less closely
    double width = 0.0;       ///< m of string that the plectrum or finger covers
    double angle = 1.5707963267948966; ///< rad from across towards into
};

/// Where the sound is taken. Of a rigid or resistive bridge: the forces with which the strings pull at it. Of a
/// soundboard: its motion, modes and remainder, as the force that would move its mean mobility alike. At a free end
/// there is no force: what is heard of such a string is Z0 times the velocity of that end. A string designed to be
/// listened to at a place of its own gives Z0 times its velocity there, in newtons too, its partials ∝ sin(nπγ) of those
/// at the bridge.
struct Listening {
    double angle = 1.5707963267948966; ///< rad from across towards into: which direction of force or motion is heard
    /// 0: both sides alike, each the plain sum; 1: the ends of a bridge lie fully left and right. In between with
    /// constant power.
    double spread = 0.0;
    bool operator==(const Listening&) const = default;
};

/// Constructing allocates; afterwards every call is real-time safe: no lock, no heap, no exception, no log.
/// One thread at a time. The result does not depend on how a span of time is cut into blocks, to the last bit.
class Engine {
public:
    explicit Engine(std::shared_ptr<const design::InstrumentDesign>);
    ~Engine();
    Engine(const Engine&) = delete;            // holds megabytes of lines; hand over by pointer
    Engine& operator=(const Engine&) = delete;

    /// At rest, as if new. Keeps design and listening.
    void reset() noexcept;

    /// Goes on from where `before` is, as if its instrument had been changed while it rings: strings, bridges and listening,
    /// within some hundredths of a second and without a click (Rail.h). `before` is no longer to be called, and must
    /// live until `takingOver` is false. False, and nothing done, where the two do not have the same strings and stops at the
    /// same rate, or where either is still taking over.
    bool takeOver(Engine& before) noexcept;
    bool takingOver() const noexcept;

    /// On a string that rings it adds. The point is kept between 0 and 1; a pluck that is no number is ignored,
    /// as is a string that does not exist, here and below.
    void pluck(int string, const Pluck&) noexcept;
    /// The string speaks from fret `stop` (0 = open) from now on. What rang before is put out at the finger.
    void stopAt(int string, int stop) noexcept;
    /// The damper takes energy so that a partial's T60 is at most `t60` seconds; 0 lifts it.
    void damp(int string, double t60) noexcept;
    /// Puts everything out within some milliseconds, without a click.
    void silence() noexcept;
    /// The same for one string.
    void silence(int string) noexcept;
    void listen(const Listening&) noexcept;

    /// Adds nothing: writes `frames` samples of bridge force in newtons. `right` may be null; then `left` is the
    /// plain sum, whatever the spread.
    void process(double* left, double* right, int frames) noexcept;

    /// Joules on all strings and boards: never grows but by what a pluck puts in.
    double energy() const noexcept;
    /// Joules on one string.
    double energy(int string) const noexcept;
    /// True when nothing would sound any more.
    bool silent() const noexcept;
    /// Strings that are being computed now.
    int ringingStrings() const noexcept;

    /// Velocity of the string at a place, m/s, at the newest sample: the sum of the two travelling waves, taken
    /// from the line. Exact for a string whose loop has no filters; where part of the loop is filter, waves that
    /// disperse are shown as if they did not. What a pluck sends appears as it reaches the bridge: wait a round trip.
    double velocityAt(int string, bool across, double ratioFromBridge) const noexcept;

    const design::InstrumentDesign& design() const noexcept;

private:
    struct Running;
    std::unique_ptr<Running> running_;
};

} // namespace hitchpin::engine
