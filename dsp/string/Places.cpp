#include "dsp/string/Places.h"

#include <cmath>
#include <numbers>

namespace hitchpin::string {
namespace {

constexpr double pi = std::numbers::pi;

/// ν = kL/π of a wave of that frequency on the endless string: (f/F0)² = ν²·(1 + Bν²).
double waveNumber(const Partials& partials, double n) {
    const double ratio = partials.frequency(n) / partials.harmonicF0(), r2 = ratio * ratio;
    return std::sqrt(2.0 * r2 / (1.0 + std::sqrt(1.0 + 4.0 * partials.inharmonicity() * r2)));
}

/// x = Bν²: bending over tension in the energy of the wave.
double bendingShare(const Partials& partials, double n) {
    const double v = waveNumber(partials, n);
    return partials.inharmonicity() * v * v;
}

/// (k/κ)² = x/(1+x).
double nearFieldTurns(End end, double x) {
    const double ratio = std::sqrt(x / (1.0 + x));
    switch (end) {
    case End::hinged:
        return 0.0;
    case End::clamped:
        return -std::atan(ratio) / pi;
    case End::free:
        return std::atan(ratio * ratio * ratio) / pi;
    }
    return 0.0;
}

} // namespace

double turnsOfSide(const Partials& partials, Side side, double share, double n) {
    const double x = bendingShare(partials, n), v = waveNumber(partials, n);
    const Ends ends = partials.ends();
    const double bridge = nearFieldTurns(ends.bridge, x), nut = nearFieldTurns(ends.nut, x);
    const double lack = (ends.oneFree() ? n - 0.5 : n) - (v + bridge + nut);
    return v * share + (side == Side::bridge ? bridge : nut) + 0.5 * lack;
}

double releaseLevel(const Partials& partials, double n) {
    const double x = bendingShare(partials, n), hinged = (1.0 + x) / (1.0 + 2.0 * x);
    switch (partials.ends().bridge) {
    case End::hinged:
        return hinged;
    case End::clamped:
        return std::sqrt(hinged);
    case End::free:
        return std::cos(pi * nearFieldTurns(End::free, x)) / std::sqrt(1.0 + x);
    }
    return hinged;
}

double releasedForce(const Partials& partials, double ratioFromBridge, double n) {
    const double angle = pi * turnsOfSide(partials, Side::bridge, ratioFromBridge, n);
    const double wave = partials.ends().bridge == End::free ? std::cos(angle) : std::sin(angle);
    return 4.0 * releaseLevel(partials, n) * std::abs(wave) * partials.slope(n) / (2.0 * pi * partials.frequency(n));
}

/// The mode sin at its antinodes has velocity ω·q, and the same q gives the force: for a hinged bridge k·T·(1+x)·q.
/// The other ends differ from it as their releaseLevel does, since the release reaches the mode alike.
double velocityLevel(const Partials& partials, double n) {
    const double x = bendingShare(partials, n), hinged = (1.0 + x) / (1.0 + 2.0 * x);
    return hinged / (releaseLevel(partials, n) * std::sqrt(1.0 + x));
}

} // namespace hitchpin::string
