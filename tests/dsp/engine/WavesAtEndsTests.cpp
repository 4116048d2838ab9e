// What travelling waves do at the ends of a string. Facts of every textbook of acoustics (common practice): a fixed
// end turns a pulse over; a free end sends it back upright and moves twice as far itself; an end of resistance R
// reflects displacement by (Z − R)/(Z + R), so that R = Z swallows it.
#include "dsp/engine/Engine.h"
#include "tests/support/PlainInstruments.h"
#include "tests/support/Worse.h"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <iostream>
#include <numbers>

using namespace hitchpin;
using engine::Engine;
using string::End;
using support::IdealString;

namespace {

constexpr int roundTrip = 400;         // samples
constexpr double impedance = 0.5;      // kg/s
constexpr double stepVelocity = 1.0;   // F/2Z for F = 1 N
constexpr int pulseSamples = 6;
/// A place a quarter of the string from the bridge: 50 samples away.
constexpr double place = 0.25;
constexpr int away = 50;
/// Within a quarter of the first round trip the step of a release has begun to fade, by 0.2 %.
constexpr double stepFades = 0.005;
/// Waves keep their shape but for the rounding of some hundred additions.
constexpr double rounding = 1e-12;

struct Motion {
    std::vector<double> heard;   ///< N at the bridge
    std::vector<double> atPlace; ///< m/s
};

/// Two opposite plucks at the middle, a few samples apart, send a pulse of displacement both ways. What has not yet
/// been at the bridge is not seen on the string, so within the first round trip the place shows only what has been
/// reflected there.
Motion firstRoundTrip(const IdealString& string, const design::BoardDesign& bridge = {}) {
    Engine engine(support::idealInstrument({string}, bridge));
    Motion motion;
    for (int i = 0; i < roundTrip - away; ++i) {
        if (i == 0 || i == pulseSamples)
            engine.pluck(0, {i == 0 ? 1.0 : -1.0, 0.5, 0.0, std::numbers::pi / 2.0});
        double out = 0.0;
        engine.process(&out, nullptr, 1);
        motion.heard.push_back(out);
        motion.atPlace.push_back(engine.velocityAt(0, false, place));
    }
    return motion;
}

/// The waves that arrive at a rigid bridge: F = 2·Z·in.
std::vector<double> arrivingAtRigidEnd() {
    std::vector<double> in = firstRoundTrip({roundTrip, impedance}).heard;
    for (double& value : in)
        value /= 2.0 * impedance;
    return in;
}

double sum(const std::vector<double>& signal) {
    double total = 0.0;
    for (const double value : signal)
        total += value;
    return total;
}

} // namespace

// From the middle the two waves come half a round trip apart, the one that left the bridge before and was turned over
// there first: +F/2Z and then −F/2Z, for six samples each.
TEST_CASE("A pulse arrives at the bridge as it was sent", "[engine]") {
    const auto in = arrivingAtRigidEnd();
    const std::vector<double> first(in.begin(), in.begin() + roundTrip / 4);
    CHECK(sum(first) == Approx(stepVelocity * pulseSamples).epsilon(stepFades));
    // Around the second the slope by which the step of the first fades adds at most 1.4/(4·400) a sample and sample.
    const int reach = 12;
    const auto middle = in.begin() + roundTrip / 2;
    const std::vector<double> second(middle - reach, middle + 16 + pulseSamples + reach);
    const double fading = 1.4 / (4.0 * roundTrip) * static_cast<double>(second.size());
    CHECK(sum(second) == Approx(-stepVelocity * pulseSamples).epsilon(fading));
}

// Turned red by: out = +in at a rigid bridge, or a reflection a sample late.
TEST_CASE("A pulse at a rigid end returns inverted", "[engine]") {
    const auto in = arrivingAtRigidEnd();
    const auto seen = firstRoundTrip({roundTrip, impedance}).atPlace;
    double worst = 0.0;
    for (std::size_t t = away; t < seen.size(); ++t)
        worst = support::worse(worst, std::abs(seen[t] + in[t - away]));
    std::cout << "rigid end: returning wave against -arriving, worst " << worst << " m/s of " << stepVelocity
              << " (allowed " << rounding << ")\n";
    CHECK(worst <= rounding * stepVelocity);
}

// Turned red by: a free bridge handled as a rigid one.
TEST_CASE("A pulse at a free end returns upright and moves the end twice as far", "[engine]") {
    const auto motion = firstRoundTrip({roundTrip, impedance, {End::hinged, End::free}});
    double worst = 0.0, leavingDisplacement = 0.0, endDisplacement = 0.0;
    for (std::size_t t = away; t < motion.atPlace.size(); ++t) {
        const double endVelocity = motion.heard[t - away] / impedance; // what is heard of a free end is Z·v
        worst = support::worse(worst, std::abs(2.0 * motion.atPlace[t] - endVelocity));
        if (t < roundTrip / 4 + away) {
            leavingDisplacement += motion.atPlace[t];
            endDisplacement += endVelocity;
        }
    }
    std::cout << "free end: end velocity against twice the returning wave, worst " << worst << " m/s (allowed "
              << rounding << ")\n";
    CHECK(worst <= rounding * stepVelocity);
    // Upright: the sign and size with which it was sent, towards a free end without any static pull.
    CHECK(leavingDisplacement == Approx(-stepVelocity * pulseSamples).epsilon(stepFades));
    CHECK(endDisplacement == Approx(-2.0 * stepVelocity * pulseSamples).epsilon(stepFades));
}

// Turned red by: v = ΣZ·in/(ΣZ+R), R and Z exchanged, or out = in − v.
TEST_CASE("A resistance reflects by its share, a matched one nothing", "[engine]") {
    const auto in = arrivingAtRigidEnd();
    double worst = 0.0, matched = 0.0;
    for (const double ratio : {1e-13, 0.1, 0.3, 1.0, 3.0, 10.0, 1000.0}) {
        const double resistance = ratio * impedance;
        const auto motion =
            firstRoundTrip({roundTrip, impedance}, {board::BridgeKind::resistance, {{resistance}}});
        const double reflected = (impedance - resistance) / (impedance + resistance);
        for (std::size_t t = away; t < motion.atPlace.size(); ++t) {
            worst = support::worse(worst, std::abs(motion.atPlace[t] - reflected * in[t - away]));
            if (ratio == 1.0)
                matched = std::max(matched, std::abs(motion.atPlace[t]));
            // The force on the bridge is R·v, v = in + out.
            worst = support::worse(worst, std::abs(motion.heard[t - away] / impedance -
                                             ratio * (1.0 + reflected) * in[t - away]));
        }
    }
    std::cout << "resistive ends: worst " << worst << " m/s, matched end returns " << matched << " m/s (allowed "
              << rounding << ")\n";
    CHECK(worst <= rounding * stepVelocity);
    CHECK(matched <= rounding * stepVelocity);
}
