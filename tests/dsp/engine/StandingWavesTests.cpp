// Standing waves: mode n has n antinodes and n + 1 still points counting both ends; with one end free, n of each.
// Common practice.
#include "dsp/engine/Engine.h"
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
using string::End;

namespace {

/// Amplitude along the string of the motion with `cycles` periods in `samples`. The string is lossless, so that its
/// motion repeats exactly and one sum over whole periods sees a single mode.
std::vector<double> modeShape(const string::Ends& ends, int roundTrip, double cycles, int samples, int places) {
    Engine engine(support::idealInstrument({{roundTrip, 0.5, ends}}));
    engine.pluck(0, {1.0, 0.2371, 0.0, std::numbers::pi / 2.0});
    // The pluck fades within four periods, two round trips each where one end is free.
    std::vector<double> ignored(static_cast<std::size_t>(10 * roundTrip));
    engine.process(ignored.data(), nullptr, 10 * roundTrip);
    std::vector<std::complex<double>> sums(static_cast<std::size_t>(places + 1));
    for (int t = 0; t < samples; ++t) {
        double out = 0.0;
        engine.process(&out, nullptr, 1);
        const auto turn = std::polar(1.0, -2.0 * std::numbers::pi * cycles * t / samples);
        for (int i = 0; i <= places; ++i)
            sums[static_cast<std::size_t>(i)] += turn * engine.velocityAt(0, false, static_cast<double>(i) / places);
    }
    std::vector<double> shape;
    for (const auto& sum : sums)
        shape.push_back(std::abs(sum) / samples);
    return shape;
}

struct Counted {
    int still = 0;
    int antinodes = 0;
    double deepest = 0.0; ///< largest motion at a still point over the largest motion
};

Counted count(const std::vector<double>& shape) {
    const double most = *std::max_element(shape.begin(), shape.end());
    Counted counted;
    const std::size_t last = shape.size() - 1;
    for (std::size_t i = 0; i <= last; ++i) {
        const bool overLeft = i == 0 || shape[i] > shape[i - 1], overRight = i == last || shape[i] >= shape[i + 1];
        if (shape[i] < 1e-9 * most) { // at rest but for rounding; neighbours move 1e-3 of the most
            ++counted.still;
            counted.deepest = std::max(counted.deepest, shape[i] / most);
        } else if (overLeft && overRight) {
            ++counted.antinodes;
        }
    }
    return counted;
}

} // namespace

// Turned red by: a wrong sign at the nut (the ends move), or taps a sample apart from each other (nothing is still).
TEST_CASE("Mode n has n antinodes and n plus 1 still points, ends counted", "[engine]") {
    constexpr int places = 840; // a multiple of 1…8: every node lies on one of them
    double worst = 0.0;
    for (int n = 1; n <= 8; ++n) {
        const auto shape = modeShape({}, 2 * places, n, 2 * places, places);
        const Counted counted = count(shape);
        CAPTURE(n);
        CHECK(counted.still == n + 1);
        CHECK(counted.antinodes == n);
        for (int k = 0; k <= n; ++k)
            CHECK(shape[static_cast<std::size_t>(k * places / n)] < 1e-9);
        worst = support::worse(worst, counted.deepest);
    }
    std::cout << "still points move at most " << worst << " of the antinodes (allowed 1e-9)\n";
}

TEST_CASE("With one end free mode n has n antinodes and n still points", "[engine]") {
    constexpr int places = 630; // a multiple of 1, 3, 5, 7, 9
    for (int n = 1; n <= 5; ++n) {
        // Mode n makes n − ½ turns in a round trip: whole turns in two.
        const auto shape = modeShape({End::hinged, End::free}, 2 * places, 2 * n - 1, 4 * places, places);
        const Counted counted = count(shape);
        CAPTURE(n);
        CHECK(counted.still == n);
        CHECK(counted.antinodes == n);
        CHECK(shape.back() < 1e-9); // the nut, fixed
    }
}
