// What a string that was held aside and let go sends to its bridge. Closed forms, no state but the start.
#pragma once

#include <array>
#include <cstdint>

namespace hitchpin::engine {

/// Unit step around t = 0 without content over half the sample rate, spread evenly over `width`. Both in samples.
/// The kernel is Dirichlet's of 16 samples under Hann's window: flat up to 5/16 of the rate, −2.5 dB at 3/8,
/// −12 dB at 7/16. It begins edgeReach + width/2 before t = 0 and ends as long after.
double edge(double t, double width) noexcept;
inline constexpr double edgeReach = 8.0;

/// One release. A force F on a point at ratio β from the bridge bends the string into a triangle; letting go is a
/// step of force −F, which sends a step of velocity a = F/2Z both ways. At the bridge (T_r the round trip):
///     −a from t1 = β·T_r/2,   and from t2 = T_r − t1 its reflection from the nut: +a where that is rigid, −a where
///     it is free.
/// After one round trip the loop repeats this by itself. The shape that was held adds the static pull: for rigid
/// ends F(1−β), so that the bridge force goes to and fro between F(1−β) and −Fβ (partials ∝ sin(nπβ)/n) around
/// a mean of nought. An ear hears no constant, so the pull comes in as a slope over the first round trip rather
/// than as a jump; a slope taken back one round trip later leaves nothing in any partial n ≥ 1. With both ends free
/// nothing holds against the hand: the string's own inertia does, and the slope stays.
/// Sources: Fletcher and Rossing, The Physics of Musical Instruments, ch. 2 (ideal pluck; from memory).
class Release {
public:
    struct Place {
        double roundTrip; ///< samples, T_r
        double ratio;     ///< β
        double width;     ///< samples of travel that the finger covers
        bool freeNut;
        bool freeBridge;
    };

    Release() = default;
    Release(std::int64_t start, double stepVelocity, const Place&) noexcept;

    /// Velocity wave arriving at the bridge at a sample, or between two, counted as `start` is.
    double at(double time) const noexcept;
    bool over(std::int64_t time) const noexcept { return time >= end_; }
    std::int64_t start() const noexcept { return start_; }

private:
    std::int64_t start_ = 0;
    std::int64_t end_ = 0;
    double origin_ = 0.0;     ///< where t = 0 lies, so that no edge begins before `start`
    double step_ = 0.0;       ///< a, m/s
    double reflected_ = 0.0;  ///< what the nut sends back, m/s
    double pull_ = 0.0;       ///< slope within the first round trip, m/s
    double pullBack_ = 0.0;   ///< and within the second
    double direct_ = 0.0;     ///< t1
    double returned_ = 0.0;   ///< t2
    double roundTrip_ = 1.0;
    double width_ = 0.0;
};

/// The releases still going on in one rail. A ninth at once ends the oldest early: what it was sending sinks to
/// nothing within a few samples, so that there is no click.
class Releases {
public:
    void add(const Release&, std::int64_t now) noexcept;
    void addTo(double* wave, int count, std::int64_t now) noexcept;
    bool pending() const noexcept { return count_ > 0 || sinking_ != 0.0; }
    void clear() noexcept;

private:
    std::array<Release, 8> releases_; ///< oldest first
    int count_ = 0;
    double sinking_ = 0.0;
};

} // namespace hitchpin::engine
