// What a string that was held aside and let go sends to its bridge.
#pragma once

#include "dsp/engine/Place.h"

#include <array>
#include <cstdint>

namespace hitchpin::engine {

/// Unit step around t = 0 without content over half the sample rate, spread evenly over `width`. Both in samples.
/// The kernel is Dirichlet's of 16 samples under Hann's window: flat up to 5/16 of the rate, −2.5 dB at 3/8,
/// −12 dB at 7/16. It begins edgeReach + width/2 before t = 0 and ends as long after.
double edge(double t, double width) noexcept;
inline constexpr double edgeReach = 8.0;

/// What one point sends when it lets go, 1 before any shaping: a step up at t = 0 (an edge of that width) that fades
/// again over four periods, below nought for a while, so that its sum is nought: a string whose ends cannot hold it is
/// not sent away. The fade is the integral of k + 2k', k four rectangles of a period each, one folded with the other:
/// its spectrum sinc⁴ is nought at every harmonic and so flat there that neither damping nor stiffness lets it reach a
/// partial. Times in samples.
double letGo(double t, double width, double period) noexcept;
inline constexpr double periodsToFade = 4.0;

/// One release. A force F held a string aside at ratio β from the bridge; letting go is a step of force −F, which
/// sends a step of velocity a = F/2Z both ways. The two reach the bridge one after the other, and its loop repeats
/// them. Seen from there they differ by the round trip S of the shorter side, whose end turns the wave over by s
/// (−1 rigid, +1 free). But for a common delay:
///     −a·(1 + s·S)    where the nut is nearer,    s·(−a)·(1 + s·S)    where the bridge is,
/// since the wave that comes later from the nut is the one that left the bridge earlier. So partial n rings by
/// |1 − S| = 2·sin(nπβ), and one with a node there not at all. The string's stiffness enters by S and by the level
/// of dsp/string/Places.h, both filters that the design brings; all releases of a rail share them.
/// A point other than the one designed uses the same filters with more or less delay: exact without stiffness. On a
/// stiff string the difference does not disperse: 0.03 of the length away, partials to the twentieth are within 0.6 dB
/// on guitar strings, 1.3 dB on a piano's A0 and 5 dB on its A4 (measured; nodes left out).
/// A width w spreads the step over w/c, which takes sin(x)/x, x = nπw/2L; with stiffness x comes out √(1+Bn²) larger,
/// 0.02 dB for a finger of 10 mm on the twentieth partial of a guitar's string.
class Release {
public:
    struct From {
        double step;      ///< a, m/s
        double ratio;     ///< β
        double width;     ///< samples of travel that the finger covers
        double roundTrip; ///< samples
        double period;    ///< samples, of the first partial
        bool freeNut;
        bool freeBridge;
    };

    Release() = default;
    Release(std::int64_t start, const From&, const Place&) noexcept;

    /// What is sent by itself and what takes the round trip of the side, before the filters, at a sample counted as
    /// `start` is. Neither begins before `start`.
    double direct(std::int64_t time) const noexcept;
    double returned(std::int64_t time) const noexcept;
    bool over(std::int64_t time) const noexcept { return time >= end_; }

private:
    std::int64_t end_ = 0;
    double directAt_ = 0.0; ///< sample, also between two, at which its step is
    double returnedAt_ = 0.0;
    double directStep_ = 0.0; ///< m/s
    double returnedStep_ = 0.0;
    double width_ = 0.0;
    double period_ = 1.0; ///< samples, of the first partial
};

/// The releases still going on in one rail, and the filters of the place. A ninth at once ends the oldest early: what
/// it was sending sinks to nothing within a few samples, so that there is no click.
class Releases {
public:
    /// Allocates, for a place that may be given later.
    void makeRoomFor(const Place&);

    void add(const Release&, std::int64_t now) noexcept;
    /// `count` at most longestChunk; the place is the same until `clear`.
    void addTo(double* wave, int count, std::int64_t now, const Place&) noexcept;
    /// Until what the filters hold has died away too.
    bool pending() const noexcept { return exciting_; }
    /// Call at fixed times of the clock: ends what has died away.
    void flush(const Place&) noexcept;
    void clear() noexcept;

private:
    std::array<Release, 8> releases_; ///< oldest first
    int count_ = 0;
    double sinkingDirect_ = 0.0;
    double sinkingReturned_ = 0.0;
    bool exciting_ = false;
    ChainState side_;
    ChainState level_;
};

} // namespace hitchpin::engine
