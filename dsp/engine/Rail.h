// One string in one direction: a loop of velocity waves between nut and bridge.
#pragma once

#include "dsp/design/LoopDesign.h"
#include "dsp/design/Sections.h"
#include "dsp/engine/Ramp.h"
#include "dsp/engine/Release.h"

#include <cstdint>
#include <vector>

namespace hitchpin::engine {

/// A designed loop in the forms that a rail runs (dsp/design/Sections.h). The energy of every one is the sum of its
/// states' squares: ladders and Thiran's section keep it, shelves never make any.
struct RailLoop {
    RailLoop(const design::LoopDesign&, bool freeNut);

    int delay;        ///< samples, at least 1
    double roundTrip; ///< samples that a wave takes once round, at the first partial
    double factor;    ///< the design's gain with the sign of the reflection at the nut
    double thiranSin; ///< the fractional delay as a plane rotation
    double thiranCos;
    std::vector<design::ShelfForm> shelves;
    std::vector<design::SteepShelfForm> steepShelves;
    std::vector<design::LadderForm> sections;
};

/// Constructing allocates for all loops that the rail will ever run; the rest is real-time safe.
class Rail {
public:
    /// Chunks longer than this are never asked for.
    static constexpr int longestChunk = 64;

    explicit Rail(const std::vector<RailLoop>& loops);

    /// From now on this loop, at rest.
    void speak(const RailLoop&) noexcept;
    /// Nothing under way any more. A damper that lies on the string stays there.
    void clear() noexcept;

    bool running() const noexcept { return running_; }
    void wake() noexcept { running_ = true; }

    /// Waves that reach the bridge in the next `count` samples, `now` being the first. All of them have left it
    /// before: count ≤ delay.
    void arrive(double* wave, int count, std::int64_t now) noexcept;
    /// Waves that leave the bridge in the same samples.
    void leave(const double* wave, int count) noexcept;

    int delay() const noexcept { return loop_->delay; }
    const RailLoop& loop() const noexcept { return *loop_; }

    /// A damper that lies on the string: a factor once a round trip.
    Ramp hold;
    /// Takes everything out, what is still to arrive from a release included.
    Ramp presence;
    Releases releases;

    /// Σ of squares of all that is under way, (m/s)²: times Z0 and over the sample rate it is the energy.
    double sumOfSquares() const noexcept;
    /// States that have decayed beyond meaning become nought before they reach the slow, denormal numbers.
    void flush() noexcept;
    /// The velocity wave that left the bridge `age` samples before the newest, between samples by Lagrange-3.
    double left(double age) const noexcept;

private:
    std::vector<double> line_; ///< ring of 2^k samples, waves that left the bridge
    std::size_t mask_ = 0;
    std::size_t next_ = 0;     ///< where the next sample is written
    const RailLoop* loop_;
    bool running_ = false;

    struct TwoStates {
        double m1 = 0.0, m2 = 0.0;
    };
    std::vector<TwoStates> sectionStates_;
    std::vector<TwoStates> steepShelfStates_;
    std::vector<double> shelfStates_;
    double thiranState_ = 0.0;
};

} // namespace hitchpin::engine
