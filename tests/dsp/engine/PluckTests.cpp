// The ideal pluck. Displacement A_n = 2h·sin(nπβ)/(π²n²β(1−β)); the force at a rigid bridge is T·slope there, whose
// partials are (2F/πn)·sin(nπβ) for a force F = hT/(β(1−β)L) held at βL. Fletcher and Rossing, The Physics of
// Musical Instruments, ch. 2 (from memory), values computed in 40-digit arithmetic from the formula.
#include "dsp/engine/Engine.h"
#include "dsp/engine/Release.h"
#include "tests/support/PlainInstruments.h"
#include "tests/support/Worse.h"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <complex>
#include <iostream>
#include <numbers>

using namespace hitchpin;
using engine::Engine;

namespace {

constexpr int period = 960;
/// The kernel of the edges is flat to 5/16 of the rate.
constexpr double amplitudeTolerance = 2e-4;
/// The step of a release fades over four periods (see Release.h) and comes a few samples late.
constexpr int underWay = 6 * period;

/// Amplitudes of partials 1…count of the bridge force, from one exact period after the pluck is all under way; the
/// sign against a cosine that starts at the release. Seen from a bridge that is the nearer end the first wave to come
/// is the one that left it βT/2 before the release; from the nut's side it is the direct one, βT/2 after.
std::vector<double> partials(const engine::Pluck& pluck, int count, double* offset = nullptr) {
    Engine engine(support::idealInstrument({{period, 0.5}}));
    engine.pluck(0, pluck);
    std::vector<double> force(underWay + period);
    engine.process(force.data(), nullptr, underWay + period);
    const double way = 0.5 * pluck.pointRatio * period, widthSamples = 0.5 * pluck.width * period; // 1 m of string
    const double late = engine::edgeReach + 0.5 * widthSamples + (pluck.pointRatio <= 0.5 ? way : -way);
    std::vector<double> amplitudes;
    for (int n = 1; n <= count; ++n) {
        std::complex<double> sum;
        for (int t = 0; t < period; ++t)
            sum += force[static_cast<std::size_t>(underWay + t)] *
                   std::polar(1.0, -2.0 * std::numbers::pi * n * (t - late) / period);
        CHECK(std::abs(sum.imag()) * 2.0 / period <= pluck.force * amplitudeTolerance);
        amplitudes.push_back(2.0 * sum.real() / period);
    }
    if (offset != nullptr) {
        *offset = 0.0;
        for (int t = 0; t < period; ++t)
            *offset += force[static_cast<std::size_t>(underWay + t)] / period;
    }
    return amplitudes;
}

engine::Pluck into(double force, double ratio, double width = 0.0) {
    return {force, ratio, width, std::numbers::pi / 2.0};
}

} // namespace

// Turned red by: a pluck point measured from the nut (β and 1−β give other signs), a sample of delay, F for F/2, 1 + S,
// a step that fades over three and a half periods.
TEST_CASE("The bridge force of a pluck follows sin n pi beta over n", "[engine]") {
    double worst = 0.0;
    for (const double beta : {0.03, 0.1, 1.0 / 7.0, 0.2, 0.5, 0.8}) {
        const auto heard = partials(into(2.0, beta), 40);
        for (int n = 1; n <= 40; ++n) {
            const double expected = 2.0 * 2.0 / (std::numbers::pi * n) * std::sin(n * std::numbers::pi * beta);
            worst = support::worse(worst, std::abs(heard[static_cast<std::size_t>(n - 1)] - expected));
        }
    }
    std::cout << "ideal pluck of 2 N, forty partials at six places: worst " << worst << " N (allowed "
              << 2.0 * amplitudeTolerance << ")\n";
    CHECK(worst <= 2.0 * amplitudeTolerance);
}

// h = 1 at β = 0.2; decibels against partial 1 for β = 1/7. Computed in 40-digit arithmetic from the formula.
TEST_CASE("A pluck has the published partials, those with a node there missing", "[engine]") {
    const double displacement[] = {.744439, .301132, .133836, .046527, 0.0, -.020679, -.024582};
    // F = hT/(β(1−β)L) with T/L = 1, and force partial n = nπ·A_n.
    const auto fifth = partials(into(1.0 / (0.2 * 0.8), 0.2), 7);
    for (int n = 1; n <= 7; ++n)
        CHECK(fifth[static_cast<std::size_t>(n - 1)] / (n * std::numbers::pi) ==
              Approx(displacement[n - 1]).margin(1e-4));

    const double decibels[] = {0.0, -6.93, -12.05, -17.05, -22.84, -31.13, -INFINITY, -36.12};
    const auto seventh = partials(into(1.0, 1.0 / 7.0), 8);
    for (int n = 1; n <= 8; ++n) {
        const double level = 20.0 * std::log10(std::abs(seventh[static_cast<std::size_t>(n - 1)] / n / seventh[0]));
        CAPTURE(n);
        if (n == 7)
            CHECK(level < -90.0);
        else
            CHECK(level == Approx(decibels[n - 1]).margin(0.02));
    }
}

TEST_CASE("The force at the bridge jumps between F times 1 minus beta and minus F beta, without a mean", "[engine]") {
    double offset = 1.0;
    partials(into(3.0, 0.25), 1, &offset);
    CHECK(std::abs(offset) < 1e-9);
    Engine engine(support::idealInstrument({{period, 0.5}}));
    engine.pluck(0, into(3.0, 0.25));
    std::vector<double> force(underWay + period);
    engine.process(force.data(), nullptr, underWay + period);
    std::vector<double> sorted(force.begin() + underWay, force.end());
    std::sort(sorted.begin(), sorted.end());
    // A quarter of the period high, the rest low, but for the ringing of the edges.
    CHECK(sorted[period / 4] == Approx(-3.0 * 0.25).margin(1e-3));
    CHECK(sorted[period * 7 / 8] == Approx(3.0 * 0.75).margin(1e-3));
}

// ½F·y at the point, y = F·β(1−β)L/T the static deflection: common practice. Turned red by: F for F/2.
TEST_CASE("A pluck leaves on the string the energy it was held with", "[engine]") {
    // Partials over 5/16 to 7/16 of the rate are missing: of the sum of sin²(nπβ)/n² about 1/(2·360) of π²β(1−β)/2.
    constexpr double missing = 0.003;
    for (const double beta : {0.2, 0.5, 0.7}) {
        const auto design = support::idealInstrument({{period, 0.5}});
        Engine engine(design);
        engine.pluck(0, into(2.0, beta));
        std::vector<double> ignored(underWay);
        engine.process(ignored.data(), nullptr, underWay);
        const double held = 0.5 * 2.0 * 2.0 * beta * (1.0 - beta) / design->strings[0].stops[0].tension;
        CHECK(engine.energy() == Approx(held).epsilon(missing));
        CHECK(engine.energy() < held);
    }
}

// A finger of width w lets go of a slope that turns over w: the partials fall by sin(x)/x, x = nπw/2L (the edge
// spread evenly over w/c, of a period 2L/c). Closed form.
TEST_CASE("A wide finger takes the upper partials by its width", "[engine]") {
    const double width = 0.08; // of a string of 1 m
    const auto sharp = partials(into(1.0, 0.31), 30), wide = partials(into(1.0, 0.31, width), 30);
    double worst = 0.0;
    for (int n = 1; n <= 30; ++n) {
        const double x = n * std::numbers::pi * width / 2.0;
        worst = support::worse(worst, std::abs(wide[static_cast<std::size_t>(n - 1)] -
                                         sharp[static_cast<std::size_t>(n - 1)] * std::sin(x) / x));
    }
    std::cout << "wide finger: worst " << worst << " N of 1 N (allowed " << amplitudeTolerance << ")\n";
    CHECK(worst <= amplitudeTolerance);
}

TEST_CASE("The direction of a pluck shares its force between across and into", "[engine]") {
    const auto heard = [](double pluckAngle, double listenAngle) {
        Engine engine(support::idealInstrument({{period, 0.5}}));
        engine.listen({listenAngle, 0.0});
        engine.pluck(0, {1.0, 0.3, 0.0, pluckAngle});
        std::vector<double> force(2 * period);
        engine.process(force.data(), nullptr, 2 * period);
        return *std::max_element(force.begin(), force.end());
    };
    const double all = heard(0.0, 0.0), right = std::numbers::pi / 2.0;
    CHECK(heard(right, right) == Approx(all));
    CHECK(heard(0.0, right) == Approx(0.0).margin(1e-12));
    CHECK(heard(right / 2.0, right) == Approx(all * std::sqrt(0.5)));
    CHECK(heard(right / 3.0, 0.0) == Approx(all * std::cos(right / 3.0)));
}

TEST_CASE("Plucks add on a ringing string, as many as come", "[engine]") {
    const auto sound = [](int plucks) {
        Engine engine(support::idealInstrument({{period, 0.5}}));
        std::vector<double> force(6 * period);
        for (int i = 0; i < plucks; ++i)
            engine.pluck(0, into(1.0 / plucks, 0.3));
        engine.process(force.data(), nullptr, 6 * period);
        return force;
    };
    const auto once = sound(1), eight = sound(8);
    double worst = 0.0;
    for (std::size_t i = 0; i < once.size(); ++i)
        worst = support::worse(worst, std::abs(once[i] - eight[i]));
    CHECK(worst < 1e-12);
    // More than eight at the same instant: the oldest is ended early, but nothing clicks or runs away.
    for (const double x : sound(50))
        REQUIRE(std::abs(x) < 3.0);
}
