#include "Source/plugin/LoadWatch.h"
#include "Source/plugin/Limiter.h"

#include <catch2/catch.hpp>

#include <cmath>
#include <iostream>
#include <limits>
#include <random>
#include <vector>

using hitchpin::plugin::Limiter;

TEST_CASE("below its threshold the limiter changes no bit") {
    std::mt19937 random(1);
    std::uniform_real_distribution<float> level(-Limiter::threshold, Limiter::threshold);
    std::vector<float> left(100000), right(left.size());
    for (std::size_t i = 0; i < left.size(); ++i) {
        left[i] = level(random) * (i % 3 == 0 ? 1e-30f : 1.0f);
        right[i] = level(random);
    }
    left[7] = Limiter::threshold; // at it is not over it
    right[9] = -Limiter::threshold;
    left[11] = -0.0f;
    const auto left0 = left, right0 = right;
    Limiter limiter;
    limiter.prepare(48000.0);
    CHECK(limiter.process(left.data(), right.data(), static_cast<int>(left.size())) == 1.0f);
    CHECK(std::equal(left.begin(), left.end(), left0.begin()));
    CHECK(std::signbit(left[11]));
    CHECK(std::equal(right.begin(), right.end(), right0.begin()));
}

TEST_CASE("nothing leaves the limiter over its threshold and both sides keep their balance") {
    std::mt19937 random(2);
    std::normal_distribution<float> level(0.0f, 3.0f);
    std::vector<float> left(100000), right(left.size());
    for (std::size_t i = 0; i < left.size(); ++i)
        left[i] = level(random), right[i] = 0.25f * left[i];
    left[500] = std::numeric_limits<float>::infinity();
    left[501] = std::numeric_limits<float>::quiet_NaN();
    right[502] = 1e30f;
    Limiter limiter;
    limiter.prepare(48000.0);
    CHECK(limiter.process(left.data(), right.data(), static_cast<int>(left.size())) < 1.0f);
    float worst = 0.0f, worstBalance = 0.0f;
    for (std::size_t i = 0; i < left.size(); ++i) {
        REQUIRE(std::isfinite(left[i]));
        worst = std::max({worst, std::abs(left[i]), std::abs(right[i])});
        if (i > 502)
            worstBalance = std::max(worstBalance, std::abs(right[i] - 0.25f * left[i]));
    }
    std::cout << "limiter: worst peak " << worst << " of " << Limiter::threshold << ", balance off by " << worstBalance << "\n";
    CHECK(worst <= Limiter::threshold);
    CHECK(worstBalance <= 1e-6f); // float rounding
}

TEST_CASE("after it acted the limiter becomes exactly transparent again and neither side of it clicks") {
    const double rate = 48000.0, pi = 3.141592653589793;
    std::vector<float> tone(static_cast<std::size_t>(rate) * 2);
    for (std::size_t i = 0; i < tone.size(); ++i) // 200 Hz, 6 dB over the threshold for a quarter of a second, then well under
        tone[i] = static_cast<float>((i < 12000 ? 2.0 * Limiter::threshold : 0.2) * std::sin(2 * pi * 200 * static_cast<double>(i) / rate));
    const auto dry = tone;
    Limiter limiter;
    limiter.prepare(rate);
    limiter.process(tone.data(), nullptr, static_cast<int>(tone.size()));
    CHECK(std::equal(tone.end() - 24000, tone.end(), dry.end() - 24000));
    double worstStep = 0.0, dryStep = 0.0;
    for (std::size_t i = 1; i < 12000; ++i) {
        worstStep = std::max(worstStep, static_cast<double>(std::abs(tone[i] - tone[i - 1])));
        dryStep = std::max(dryStep, static_cast<double>(std::abs(dry[i] - dry[i - 1])));
    }
    std::cout << "limiter: largest step " << worstStep << ", of the input " << dryStep << "\n";
    CHECK(worstStep <= dryStep); // it never makes a step steeper than the wave's own
}

TEST_CASE("the load watch asks for relief only when the machine falls behind, and for as much as is needed") {
    using hitchpin::plugin::LoadWatch;
    LoadWatch watch;
    watch.prepare(48000.0);
    for (int block = 0; block < 400; ++block)
        CHECK(watch.took(0.5 * 480.0 / 48000.0, 480) == 0.0);
    CHECK(watch.load() == Approx(0.5).epsilon(0.01));
    CHECK(watch.took(0.015, 480) == 0.0); // one late block is no reason
    // A machine whose load goes with the strings: 300 of them are half as much again as it can run.
    double strings = 300.0;
    int asked = 0;
    for (int block = 0; block < 1000; ++block) {
        const double share = watch.took(strings / 200.0 * 480.0 / 48000.0, 480);
        asked += share > 0.0 ? 1 : 0;
        strings *= 1.0 - share;
    }
    std::cout << "load watch: " << strings << " of 300 strings left after " << asked << " reliefs\n";
    CHECK(strings <= LoadWatch::tooMuch * 200.0);
    CHECK(strings >= 0.5 * LoadWatch::comfortable * 200.0);
    CHECK(asked <= 4);
    CHECK(watch.took(1.0, 0) == 0.0);
}
