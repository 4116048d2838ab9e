// One string in one direction: a loop of velocity waves between nut and bridge.
#pragma once

#include "dsp/design/InstrumentDesign.h"
#include "dsp/engine/Chain.h"
#include "dsp/engine/Ramp.h"
#include "dsp/engine/Release.h"

#include <algorithm>
#include <array>
#include <cstdint>
#include <optional>
#include <vector>

namespace hitchpin::engine {

/// A string as it speaks from one stop, in the forms that a rail runs.
struct RailLoop {
    RailLoop(const design::SpeakingString&, const string::Ends&);

    int delay;        ///< samples, at least 1
    double roundTrip; ///< samples that a wave takes once round, at the first partial
    double period;    ///< samples, of the first partial
    bool freeNut;
    Chain chain;      ///< all but the delay, with the sign of the reflection at the nut
    Place plucked;
    std::optional<Place> listening;
};

/// Constructing allocates for all loops that the rail will ever run; the rest is real-time safe.
class Rail {
public:
    explicit Rail(const std::vector<RailLoop>& loops);

    /// From now on this loop, at rest.
    void speak(const RailLoop&) noexcept;
    /// Nothing under way any more. A damper that lies on the string stays there.
    void clear() noexcept;

    /// Goes on from where `before` is, as if its string had been changed while it rings. The line holds waves that left the
    /// bridge, which belong to no design: from it this rail's filters are run in, and then take over within `fade` samples,
    /// inside the loop. Any mixture of two passive loops is passive. What was being released when it changed is still sent
    /// by `before`, which must live until `takingOver` is false. False, and nothing done, where the line is too short for it.
    bool canTakeOver(const Rail& before) const noexcept;
    void takeOver(Rail& before, const RailLoop&, int fade) noexcept;
    bool takingOver() const noexcept { return before_ != nullptr; }

    bool running() const noexcept { return running_; }
    void wake() noexcept { running_ = true; }

    /// Waves that reach the bridge in the next `count` samples, `now` being the first. All of them have left it
    /// before: count ≤ delay.
    void arrive(double* wave, int count, std::int64_t now) noexcept;
    /// Waves that leave the bridge in the same samples.
    void leave(const double* wave, int count) noexcept;
    /// What is heard of those samples where the string is listened to at a place: its velocity there, m/s. Null where
    /// the bridge is listened to.
    const double* heard() const noexcept { return loop_->listening ? heard_.data() : nullptr; }

    int delay() const noexcept {
        return before_ != nullptr ? std::min(loop_->delay, before_->loop_->delay) : loop_->delay;
    }
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

    ChainState chain_;

    void readLine(double* wave, int count, int delay) const noexcept;
    Rail* before_ = nullptr; ///< whose filters still run on this line
    int runningIn_ = 0;      ///< samples until these filters begin to take over
    int fade_ = 1;
    Ramp own_;               ///< how much of what arrives is these filters'

    void listen(const Place&, int count) noexcept;
    std::vector<double> arrived_; ///< as far back as any place of listening waits, then the newest chunk
    std::array<double, longestChunk> heard_{};
    ChainState listeningSide_;
    ChainState listeningLevel_;
};

} // namespace hitchpin::engine
