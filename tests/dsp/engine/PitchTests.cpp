// The pitch that sounds is the pitch of the schedule.
#include "dsp/analysis/Measure.h"
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
using support::RealString;

namespace {

/// The project's promise for every string, far under what the best ears tell apart.
constexpr double pitchTolerance = 0.01; // cents

/// The lowest `count` partials that a plucked string sounds, Hz.
std::vector<double> heard(const design::InstrumentDescription& described, double sampleRate, int count) {
    auto made = design::makeInstrument(described, {sampleRate, design::Quality::live});
    REQUIRE(made);
    Engine engine(*made);
    engine.pluck(0, {1.0, 0.17, 0.001, std::numbers::pi / 2.0});
    std::vector<double> sound(static_cast<std::size_t>(1.5 * sampleRate));
    engine.process(sound.data(), nullptr, static_cast<int>(sound.size()));
    const auto& partials = described.courses.front().strings.front().partials;
    std::vector<double> expected, frequencies;
    for (int n = 1; n <= count && partials.frequency(n) < 0.45 * sampleRate; ++n)
        expected.push_back(partials.frequency(n));
    for (const auto& partial : analysis::measurePartials(sound, sampleRate, expected))
        frequencies.push_back(partial.frequency);
    return frequencies;
}

/// Against the pitch that was asked for.
double centsOff(const RealString& string, double sampleRate) {
    return analysis::centsBetween(heard(support::realDescription({string}), sampleRate, 4).front(), string.hertz);
}

} // namespace

// Turned red by: a sample of delay too much in the engine's loop, F0 for f1.
TEST_CASE("The first partial that sounds is the one of the schedule", "[engine]") {
    const RealString strings[] = {
        {"music wire", 1.35, 1.2e-3, 55.0, 33},        {"music wire", 1.1, 1.05e-3, 110.0, 45},
        {"music wire", 0.62, 1.0e-3, 261.6256, 60},    {"music wire", 0.40, 0.95e-3, 440.0, 69},
        {"music wire", 0.185, 0.87e-3, 1046.502, 84},  {"music wire", 0.052, 0.79e-3, 4186.009, 108},
        {"music wire", 0.648, 0.254e-3, 329.6276, 64}, {"nylon", 0.65, 0.711e-3, 329.6276, 64},
        {"gut", 0.9, 1.0e-3, 146.8324, 50},            {"yellow brass", 1.2, 0.5e-3, 110.0, 45},
        {"phosphor bronze", 0.8, 0.6e-3, 130.0, 48},   {"pvdf", 0.3, 0.6e-3, 523.2511, 72},
    };
    double worst = 0.0;
    for (const auto& string : strings)
        for (const double rate : {44100.0, 48000.0, 96000.0}) {
            CAPTURE(string.material, string.hertz, rate);
            const double cents = centsOff(string, rate);
            CHECK(std::abs(cents) <= pitchTolerance);
            worst = support::worse(worst, std::abs(cents));
        }
    std::cout << "f1 heard against the schedule, twelve strings at three rates: worst " << worst << " cent (allowed "
              << pitchTolerance << ")\n";
}

// f_n = n·F0·√(1+Bn²), B = π³Ed⁴/(64TL²) (Fletcher 1964), from the dimensions alone; T = 4μL²f1²/(1+B) (Mersenne), with
// d and μ thinned by the stretch, 1/(1 + T/ES) of the area.
// Turned red by: ε for B.
TEST_CASE("The partials that sound are those of the string's dimensions", "[engine]") {
    constexpr double covered = 1.0; // cents: what live quality keeps to
    struct Row {
        RealString string;
        double density, fast, slow; // kg/m³, Pa
    };
    const Row rows[] = {{{"music wire", 0.62, 1.0e-3, 261.6256, 60}, 7850, 200e9, 200e9},
                        {{"music wire", 0.185, 0.87e-3, 1046.502, 84}, 7850, 200e9, 200e9},
                        {{"yellow brass", 0.6, 0.5e-3, 220.0, 57}, 8530, 107e9, 107e9},
                        {{"nylon", 0.65, 0.711e-3, 329.6276, 64}, 1070, 4.5e9, 3.0e9}};
    double worst = 0.0;
    for (const auto& [string, density, fast, slow] : rows) {
        const double area = M_PI / 4.0 * string.diameterMetres * string.diameterMetres, length = string.lengthMetres;
        double tension = 0.0, b = 0.0;
        for (int i = 0; i < 50; ++i) {
            const double thin = area / (1.0 + tension / (slow * area));
            tension = 4.0 * density * thin * std::pow(length * string.hertz, 2) / (1.0 + b);
            b = M_PI * fast * thin * thin / (4.0 * tension * length * length); // d⁴ = (4S/π)²
        }
        const auto sounding = heard(support::realDescription({string}), 48000.0, 8);
        for (int n = 1; n <= static_cast<int>(sounding.size()); ++n) {
            CAPTURE(string.material, string.hertz, n, b);
            const double f = n * string.hertz * std::sqrt((1.0 + b * n * n) / (1.0 + b));
            const double off = std::abs(analysis::centsBetween(sounding[static_cast<std::size_t>(n - 1)], f));
            CHECK(off <= covered);
            worst = support::worse(worst, off);
        }
    }
    std::cout << "eight partials heard against the dimensions of four strings: worst " << worst << " cent (allowed "
              << covered << ")\n";
}

// Turned red by: a free bridge handled as a rigid one.
TEST_CASE("A string with other ends sounds as the schedule says", "[engine]") {
    using enum string::End;
    RealString string{"music wire", 0.65, 0.5e-3, 110.0, 45};
    for (const string::Ends ends : {string::Ends{free, hinged}, {hinged, free}, {free, free}, {clamped, clamped}}) {
        string.ends = ends;
        CAPTURE(static_cast<int>(ends.nut), static_cast<int>(ends.bridge));
        CHECK(std::abs(centsOff(string, 48000.0)) <= pitchTolerance);
    }
}

TEST_CASE("A string stopped at the twelfth fret sounds the octave of its stiffness", "[engine]") {
    RealString string{"music wire", 0.65, 0.4e-3, 196.0, 55};
    string.frets = 12;
    const auto described = support::realDescription({string});
    auto made = design::makeInstrument(described, {48000.0, design::Quality::live});
    REQUIRE(made);
    Engine engine(*made);
    engine.stopAt(0, 12);
    engine.pluck(0, {1.0, 0.17, 0.001, std::numbers::pi / 2.0});
    std::vector<double> sound(48000);
    engine.process(sound.data(), nullptr, 48000);
    const auto stopped = string::stoppedAt(described.courses[0].strings[0], 0.5);
    REQUIRE(stopped);
    const std::vector<double> expected{stopped->partials.frequency(1), stopped->partials.frequency(2)};
    const auto measured = analysis::measurePartials(sound, 48000.0, expected);
    CHECK(std::abs(analysis::centsBetween(measured[0].frequency, expected[0])) <= pitchTolerance);
    CHECK(expected[0] > 2.0 * 196.0); // stiffness sharpens a short string more
}
