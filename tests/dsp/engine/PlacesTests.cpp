// Where a string is plucked and listened to, heard from the engine itself and projected onto the poles of its loops.
#include "dsp/engine/Engine.h"
#include "dsp/engine/Release.h"
#include "dsp/string/Places.h"
#include "tests/support/PlainInstruments.h"
#include "tests/support/Response.h"
#include "tests/support/YardstickStrings.h"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <complex>
#include <cstdio>
#include <cstdlib>
#include <iostream>
#include <numbers>
#include <string>
#include <vector>

using namespace hitchpin;
using engine::Engine;

namespace {

constexpr double rate = 48000.0;
/// The goals, up to the twentieth partial that the loop covers.
constexpr double levelGoalDb = 0.5, nullGoalDb = -60.0;
constexpr double leastLevel = 0.1;
constexpr int countedPartials = 20;
/// Between the engine and the same filters evaluated at the poles: what the window lets in from other partials.
constexpr double agreementDb = 0.002;

bool whole() { return std::getenv("HITCHPIN_LONG_TESTS") != nullptr; }

design::InstrumentDescription described(const yardstick::YardstickString& string, double pluckRatio,
                                        double listeningRatio = 0.0) {
    string::Strung strung;
    strung.description.speakingLength = 1.0;
    strung.description.ends = string.ends;
    strung.partials = string.partials();
    strung.statics.impedance = 0.7;
    design::InstrumentDescription instrument;
    instrument.boards.resize(1);
    instrument.bridges.resize(1);
    design::CourseDescription course;
    course.strings = {strung};
    course.pluckRatio = pluckRatio;
    course.listeningRatio = listeningRatio;
    instrument.courses = {course};
    return instrument;
}

std::shared_ptr<const design::InstrumentDesign> designed(const design::InstrumentDescription& instrument) {
    auto made = design::makeInstrument(instrument, {rate, design::Quality::live});
    REQUIRE(made);
    return *std::move(made);
}

std::vector<double> render(Engine& engine, double seconds) {
    std::vector<double> sound(static_cast<std::size_t>(seconds * rate));
    engine.process(sound.data(), nullptr, static_cast<int>(sound.size()));
    return sound;
}

/// Amplitude that e^(p·t) has in the sound at sample `origin`: its decay undone, turned to rest and weighted by
/// Blackman and Harris's window (1978), whose side lobes lie 92 dB down; partials lie at least eight of its bins apart.
double amplitudeOf(const std::vector<double>& sound, std::complex<double> p, std::size_t from, double origin) {
    const std::size_t count = sound.size() - from;
    std::complex<double> sum;
    double weights = 0.0;
    for (std::size_t i = 0; i < count; ++i) {
        const double turn = 2.0 * std::numbers::pi * (static_cast<double>(i) + 0.5) / static_cast<double>(count);
        const double weight =
            0.35875 - 0.48829 * std::cos(turn) + 0.14128 * std::cos(2.0 * turn) - 0.01168 * std::cos(3.0 * turn);
        sum += weight * sound[from + i] * std::exp(-p * (static_cast<double>(from + i) - origin));
        weights += weight;
    }
    return 2.0 * std::abs(sum) / weights;
}

struct Heard {
    double levelDb = 0.0, nullDb = -300.0, agreementDb = 0.0;
};

/// Plucked with 1 N at a point and heard at the bridge or at a place, against the closed forms and against the same
/// filters evaluated at the poles.
Heard hear(const yardstick::YardstickString& string, double pluckRatio, double listeningRatio) {
    const auto design = designed(described(string, pluckRatio, listeningRatio));
    const auto& speaking = design->strings[0].stops[0];
    const auto& loop = speaking.loop;
    const string::Partials partials = string.partials();
    Engine engine(design);
    engine.pluck(0, {1.0, pluckRatio, 0.0, std::numbers::pi / 2.0});
    const double period = rate / partials.frequency(1.0);
    const auto from = static_cast<std::size_t>(engine::periodsToFade * period) + 1000;
    const auto sound = render(engine, std::max(0.06, 16.0 * period / rate) + static_cast<double>(from) / rate);

    const auto lateBy = [](const design::PlaceDesign& place) { return std::max(0, -place.delay); };
    const auto comb = [&](const design::PlaceDesign& place, support::LongComplex z) {
        const auto side = place.ratio <= 0.5 ? string::Side::bridge : string::Side::nut;
        const auto sign = static_cast<support::Long>(string::turnAt(string::endOf(string.ends, side)));
        return static_cast<double>(std::abs(support::levelOf(place, z) *
                                            (support::Long(1) + sign * support::sideOf(place, z))));
    };
    Heard worst;
    for (int n = 1; n <= std::min(countedPartials, loop.accuracy.coveragePartial); ++n) {
        const auto pole = support::poleNear(loop, partials.frequency(n), partials.decayRate(n));
        const std::complex<double> p(static_cast<double>(pole.p.real()), static_cast<double>(pole.p.imag()));
        const support::LongComplex z = std::exp(pole.p);
        std::complex<double> sent;
        for (int t = 0; t < static_cast<int>(from); ++t)
            sent += engine::letGo(t - engine::edgeReach, 0.0, period) *
                    std::exp(-p * (t - engine::edgeReach));
        double evaluated = 2.0 * comb(speaking.plucked, z) * std::abs(sent) / static_cast<double>(std::abs(pole.delay));
        // What waits for S is late by as much.
        evaluated *= std::exp(-p.real() * lateBy(speaking.plucked));
        const double v = string.ends.oneFree() ? n - 0.5 : n;
        double wave = std::sin(v * std::numbers::pi * pluckRatio), unmissed = 2.0 / (v * std::numbers::pi);
        if (speaking.listening) {
            evaluated *= 0.5 * comb(*speaking.listening, z);
            evaluated *= std::exp(-p.real() * lateBy(*speaking.listening));
            wave *= std::sin(v * std::numbers::pi * listeningRatio);
            unmissed /= std::sqrt(1.0 + partials.inharmonicity() * v * v);
        }
        const double amplitude = amplitudeOf(sound, p, from, engine::edgeReach);
        if (std::abs(wave) >= leastLevel) {
            worst.levelDb = std::max(worst.levelDb, std::abs(20.0 * std::log10(amplitude / unmissed / std::abs(wave))));
            worst.agreementDb = std::max(worst.agreementDb, std::abs(20.0 * std::log10(amplitude / evaluated)));
        } else if (std::abs(wave) < 1e-9) {
            worst.nullDb = std::max(worst.nullDb, 20.0 * std::log10(amplitude / unmissed));
        }
    }
    return worst;
}

} // namespace

// Turned red by: 1 + S at a rigid end, the level left out, what should wait for S not waiting, Thiran's section left out
// of a side, a wave that does not turn over at the nut on its way back to a listening point.
TEST_CASE("What sounds has the levels and the missing partials of its places", "[engine]") {
    struct Case {
        const char* string;
        double plucked, heard;
    };
    std::vector<Case> cases{{"piano A0", 0.1, 0.0},         {"piano A2", 1.0 / 7.0, 0.0},   {"piano A4", 0.2, 0.0},
                            {"piano C6", 0.05, 0.0},        {"piano C8", 1.0 / 3.0, 0.0},   {"steel E4 plain", 0.13, 0.0},
                            {"steel E4 plain", 0.8, 0.0},   {"steel E2 wound", 0.5, 0.0},   {"nylon C3", 1.0 / 3.0, 0.0},
                            {"brass C3, nut free", 0.2, 0.0}, {"piano A2", 0.11, 0.25},     {"piano C8", 0.13, 0.03},
                            {"steel E4 plain", 0.13, 0.9},  {"brass C3, nut free", 0.13, 0.6}};
    // All but the bar-like string: the window that tells partials apart is made for nearly whole multiples, and lets the
    // others of a bar in. Its places are judged at the poles (PlaceTests).
    if (whole())
        for (const auto& string : yardstick::strings())
            for (const double ratio : {0.03, 0.05, 0.1, 0.13, 1.0 / 7.0, 0.2, 0.25, 1.0 / 3.0, 0.4, 0.5}) {
                if (string.inharmonicity > 0.01)
                    continue;
                cases.push_back({string.name, ratio, 0.0});
                cases.push_back({string.name, 0.23, ratio});
            }
    const auto strings = yardstick::strings();
    Heard all;
    std::printf("plucked and heard through the engine        level dB  missing dB  from its filters dB\n");
    for (const Case& one : cases) {
        const auto& string =
            *std::find_if(strings.begin(), strings.end(), [&](const auto& s) { return std::string(s.name) == one.string; });
        const Heard heard = hear(string, one.plucked, one.heard);
        INFO(one.string << " plucked at " << one.plucked << ", heard at " << one.heard);
        CHECK(heard.levelDb <= levelGoalDb);
        CHECK(heard.nullDb <= nullGoalDb);
        CHECK(heard.agreementDb <= agreementDb);
        std::printf("  %-20s at %.3f, heard at %.2f  %8.3f %11.1f %10.4f\n", one.string, one.plucked, one.heard,
                    heard.levelDb, heard.nullDb, heard.agreementDb);
        all.levelDb = std::max(all.levelDb, heard.levelDb);
        all.nullDb = std::max(all.nullDb, heard.nullDb);
        all.agreementDb = std::max(all.agreementDb, heard.agreementDb);
    }
    std::printf("  worst (goals %.1f, %.0f, %.3f) %27.3f %11.1f %10.4f\n", levelGoalDb, nullGoalDb, agreementDb, all.levelDb,
                all.nullDb, all.agreementDb);
}

TEST_CASE("On a stiff string plucks add, whatever their points", "[engine]") {
    const auto strings = yardstick::strings();
    const auto design = designed(described(strings[2], 0.2));
    const auto sound = [&](const std::vector<double>& ratios) {
        Engine engine(design);
        std::vector<double> all;
        for (const double ratio : ratios) {
            if (ratio > 0.0)
                engine.pluck(0, {1.0, ratio, 0.003, std::numbers::pi / 2.0});
            const auto part = render(engine, 0.013);
            all.insert(all.end(), part.begin(), part.end());
        }
        return all;
    };
    const auto both = sound({0.2, 0.7, 0.0, 0.0, 0.0}), one = sound({0.2, 0.0, 0.0, 0.0, 0.0}),
               other = sound({0.0, 0.7, 0.0, 0.0, 0.0});
    double worst = 0.0, peak = 0.0;
    for (std::size_t i = 0; i < both.size(); ++i) {
        worst = std::max(worst, std::abs(both[i] - one[i] - other[i]));
        peak = std::max(peak, std::abs(both[i]));
    }
    CHECK(peak > 0.5);
    CHECK(worst < 1e-12);
}

// The designed side with more or less delay: how far that carries, as a measurement; without stiffness it is exact
// (PluckTests). Turned red by: the other end's sign beyond the middle, or a delay that is not moved.
TEST_CASE("Plucked elsewhere than designed a string still has the levels of where it was plucked", "[engine]") {
    constexpr double elsewhereDb = 1.0; // a gauge of how much the near-exact form may miss, a first partial in ten
    for (const char* name : {"steel E4 plain", "nylon C6", "brass C3"}) {
        const auto strings = yardstick::strings();
        const auto& string =
            *std::find_if(strings.begin(), strings.end(), [&](const auto& s) { return std::string(s.name) == name; });
        const auto design = designed(described(string, 0.2));
        const auto& loop = design->strings[0].stops[0].loop;
        const string::Partials partials = string.partials();
        double worst = 0.0;
        for (const double ratio : {0.13, 0.27, 0.73, 0.87}) {
            Engine engine(design);
            engine.pluck(0, {1.0, ratio, 0.0, std::numbers::pi / 2.0});
            const auto from = static_cast<std::size_t>(engine::periodsToFade * rate / partials.frequency(1.0)) + 1000;
            const auto sound = render(engine, 0.3);
            for (int n = 1; n <= std::min(countedPartials, loop.accuracy.coveragePartial); ++n) {
                const double wave = std::abs(std::sin(n * std::numbers::pi * ratio));
                if (wave < 0.3)
                    continue;
                const auto pole = support::poleNear(loop, partials.frequency(n), partials.decayRate(n));
                const std::complex<double> p(static_cast<double>(pole.p.real()), static_cast<double>(pole.p.imag()));
                const double amplitude = amplitudeOf(sound, p, from, engine::edgeReach);
                worst = std::max(worst, std::abs(20.0 * std::log10(amplitude * n * std::numbers::pi / 2.0 / wave)));
            }
        }
        std::cout << name << ", designed for 0.2 and plucked at 0.13 to 0.87: levels within " << worst << " dB (allowed "
                  << elsewhereDb << ")\n";
        CHECK(worst <= elsewhereDb);
    }
}

// Both ends free: nothing holds the string, and yet a pluck must not send it away.
TEST_CASE("A pluck leaves no drift, whatever the ends", "[engine]") {
    using string::End;
    for (const End nut : {End::hinged, End::free})
        for (const End bridge : {End::hinged, End::free})
            for (const double ratio : {0.13, 0.7}) {
                constexpr int period = 400;
                Engine engine(support::idealInstrument({{period, 0.5, {nut, bridge}}}));
                engine.pluck(0, {1.0, ratio, 0.0, std::numbers::pi / 2.0});
                render(engine, 9.0 * period / rate);
                double mean = 0.0, peak = 0.0;
                for (const double x : render(engine, 2.0 * period / rate)) { // a period where one end is free
                    mean += x / (2.0 * period);
                    peak = std::max(peak, std::abs(x));
                }
                INFO(static_cast<int>(nut) << static_cast<int>(bridge) << " at " << ratio);
                CHECK(peak > 0.1);
                CHECK(std::abs(mean) < 1e-9);
            }
}
