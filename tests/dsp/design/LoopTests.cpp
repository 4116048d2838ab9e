// Loops of every kind of string: sound, tuned, the same each time. How true they are is in AccuracyTableTests.cpp.
#include "dsp/design/MakeLoop.h"

#include "dsp/analysis/Measure.h"
#include "dsp/design/Sections.h"
#include "tests/support/LoopPoles.h"
#include "tests/support/Worse.h"
#include "tests/support/YardstickStrings.h"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <cstdio>
#include <iostream>
#include <random>
#include <string>

using namespace hitchpin;
using namespace hitchpin::design;

namespace {

constexpr double firstPartialCents = 0.01; // asked of every string
constexpr double partialCents = 1.0;       // of every covered partial, live
constexpr double t60Share = 0.04;          // of every covered partial up to 6 kHz

void checkSound(const LoopDesign& loop) {
    CHECK(loop.delay >= 1);
    CHECK(loop.gain < 1.0);
    CHECK(loop.gain > 0.0);
    CHECK(std::abs(loop.thiran) < 1.0);
    CHECK(std::abs(loop.turn) == 1.0);
    for (const AllpassSection& section : loop.sections) {
        CHECK(section.c0 > 0.0);
        CHECK(section.c1 > 0.0);
        const auto [a1, a2] = directForm(section);
        CHECK(std::abs(a2) < 1.0);
        CHECK(std::abs(a1) < 1.0 + a2);
    }
    for (const LossShelf& shelf : loop.shelves) {
        CHECK((shelf.order == 1 || shelf.order == 2));
        CHECK(shelf.corner > 0.0);
        CHECK(shelf.depth > 0.0);
    }
    CHECK(loop.accuracy.peakLoopGain < 1.0);
}

struct Judged {
    double firstCents = 0.0, worstCents = 0.0, worstT60 = 0.0;
    int worstPartial = 1;
};

Judged judge(const LoopDesign& loop, const string::Partials& partials) {
    Judged judged;
    const support::RunningLoop running(loop);
    for (int n = 1; n <= loop.accuracy.coveragePartial; ++n) {
        const double target = partials.frequency(n);
        const auto pole = running.poleNear(target, partials.decayRate(n));
        const double cents = std::abs(analysis::centsBetween(pole.frequency, target));
        if (n == 1)
            judged.firstCents = cents;
        if (!(cents <= judged.worstCents))
            judged.worstPartial = n;
        judged.worstCents = support::worse(judged.worstCents, cents);
        if (target <= 6000.0)
            judged.worstT60 =
                support::worse(judged.worstT60, std::abs(partials.decayRate(n) / pole.decayRate - 1.0));
    }
    return judged;
}

LoopDesign made(const string::Partials& partials, double rate, Quality quality) {
    auto loop = makeLoop(partials, {rate, quality});
    INFO((loop ? std::string() : loop.error().message));
    REQUIRE(loop);
    return *std::move(loop);
}

const yardstick::YardstickString& yardstickNamed(const std::string& name) {
    static const auto strings = yardstick::strings();
    return *std::find_if(strings.begin(), strings.end(), [&](const auto& s) { return s.name == name; });
}

} // namespace

TEST_CASE("loop, every kind of ends", "[design]") {
    using string::End;
    for (const End nut : {End::hinged, End::clamped, End::free}) {
        for (const End bridge : {End::hinged, End::clamped, End::free}) {
            const string::Partials partials(220.0, 2e-4, {nut, bridge}, {3e-3, 2e-4, 5e-4, 6e-3}, 128);
            const LoopDesign loop = made(partials, 48000.0, Quality::live);
            const Judged judged = judge(loop, partials);
            std::printf("ends %d %d: K %zu, first %.1e cents, worst %.3f cents (%d), T60 %.2f %%\n",
                        static_cast<int>(nut), static_cast<int>(bridge), loop.sections.size(),
                        judged.firstCents, judged.worstCents, judged.worstPartial, 100.0 * judged.worstT60);
            INFO("nut " << static_cast<int>(nut) << ", bridge " << static_cast<int>(bridge));
            checkSound(loop);
            CHECK(loop.turn == ((nut == End::free) != (bridge == End::free) ? -1.0 : 1.0));
            CHECK(judged.firstCents <= firstPartialCents);
            CHECK(judged.worstCents <= partialCents);
            CHECK(judged.worstT60 <= t60Share);
        }
    }
}

TEST_CASE("loop, first partial of a whole compass at every rate", "[design]") {
    // A compass like a piano's: inharmonicity falls to the tenor and doubles every eight semitones above
    // (Young 1952), T60 from air and material.
    double worst = 0.0, worstAll = 0.0;
    for (const double rate : {22050.0, 44100.0, 48000.0, 88200.0, 192000.0}) {
        for (int key = 21; key <= 108; key += rate == 48000.0 ? 3 : 7) {
            const double f1 = 440.0 * std::exp2((key - 69) / 12.0);
            const double b = 3.466e-4 * std::exp2((key - 60) / 8.0) + 2e-4 * std::exp2((21 - key) / 12.0);
            const string::Partials partials(f1 / std::sqrt(1.0 + b), b, {}, {3e-3, 2e-4, 5e-4, 6e-3}, 128);
            const LoopDesign loop = made(partials, rate, Quality::live);
            const auto pole = support::RunningLoop(loop).poleNear(f1, partials.decayRate(1));
            INFO("key " << key << " at " << rate << " Hz");
            checkSound(loop);
            CHECK(std::abs(analysis::centsBetween(pole.frequency, f1)) <= firstPartialCents);
            worst = support::worse(worst, std::abs(analysis::centsBetween(pole.frequency, f1)));
            worstAll = support::worse(worstAll, loop.accuracy.worstCents);
        }
    }
    std::cout << "loop, first partials A0 to C8, 22.05 to 192 kHz: worst " << worst
              << " cents (all covered partials " << worstAll << ")\n";
}

TEST_CASE("loop, sound for any string", "[design]") {
    std::mt19937 random(11);
    const auto between = [&](double low, double high) {
        return low * std::pow(high / low, std::uniform_real_distribution<double>()(random));
    };
    double worstFirst = 0.0, worstPeak = 0.0;
    int poor = 0;
    const int count = 150;
    for (int i = 0; i < count; ++i) {
        const double rates[] = {22050.0, 44100.0, 48000.0, 96000.0};
        const double rate = rates[random() % 4];
        const double f1 = between(20.0, 0.2 * rate), b = between(1e-7, 2e-2);
        string::Ends ends;
        if (random() % 8 == 0)
            ends.bridge = string::End::free;
        string::Losses losses{between(1e-4, 5e-2), between(1e-5, 5e-3), between(1e-4, 2e-3),
                              between(2e-4, 0.1)};
        const double turns = ends.oneFree() ? 0.5 : 1.0;
        const string::Partials partials(f1 / (turns * std::sqrt(1.0 + b * turns * turns)), b, ends, losses,
                                        128);
        INFO("string " << i << ": " << f1 << " Hz, B " << b << ", at " << rate << " Hz");
        const LoopDesign loop = made(partials, rate, Quality::live);
        checkSound(loop);
        const support::RunningLoop running(loop);
        const auto pole = running.poleNear(partials.frequency(1), partials.decayRate(1));
        const double cents = std::abs(analysis::centsBetween(pole.frequency, partials.frequency(1)));
        CHECK(cents <= firstPartialCents);
        CHECK(running.peakGain(250) < 1.0);
        worstFirst = support::worse(worstFirst, cents);
        worstPeak = support::worse(worstPeak, loop.accuracy.peakLoopGain);
        poor += loop.accuracy.worstCents > partialCents ? 1 : 0;
    }
    std::cout << "loop, " << count << " random strings: first partial within " << worstFirst
              << " cents, highest loop gain 1 - " << 1.0 - worstPeak << ", " << poor
              << " with a covered partial over 1 cent\n";
}

TEST_CASE("loop, a string without losses still loses something", "[design]") {
    const string::Partials partials(220.0, 1e-4, {}, {}, 128);
    const LoopDesign loop = made(partials, 48000.0, Quality::live);
    checkSound(loop);
    CHECK(loop.accuracy.partials[0].number == 1);
    CHECK(support::RunningLoop(loop).peakGain(1000) < 1.0);
    CHECK(support::RunningLoop(loop).peakGain(1000) > 1.0 - 1e-6);
}

TEST_CASE("loop, retuned from a neighbour", "[design]") {
    for (const Quality quality : {Quality::live, Quality::reference}) {
        for (const char* name : {"piano A2", "piano A4", "steel E4 plain", "nylon C6"}) {
            const auto& string = yardstickNamed(name);
            const LoopDesign neighbour = made(string.partials(), 48000.0, quality);
            for (const double cents : {-1.0, 0.6, 4.0, 100.0}) {
                const string::Partials partials = string.partials(cents);
                const auto loop = retuneLoop(neighbour, partials, {48000.0, quality});
                REQUIRE(loop);
                INFO(name << ", " << cents << " cents");
                checkSound(*loop);
                const Judged judged = judge(*loop, partials);
                CHECK(judged.firstCents <= firstPartialCents);
                CHECK(judged.worstCents <= partialCents);
                CHECK(judged.worstT60 <= t60Share);
            }
        }
    }
    // Another rate, or another kind of end, is no neighbour: the result is as if designed from nothing.
    const auto& string = yardstickNamed("piano A4");
    const LoopDesign neighbour = made(string.partials(), 48000.0, Quality::live);
    const auto elsewhere = retuneLoop(neighbour, string.partials(), {44100.0, Quality::live});
    REQUIRE(elsewhere);
    CHECK(elsewhere->sampleRate == 44100.0);
    CHECK(judge(*elsewhere, string.partials()).firstCents <= firstPartialCents);
}

TEST_CASE("loop, the same string gives the same loop", "[design]") {
    const auto partials = yardstickNamed("piano A4").partials();
    const LoopDesign one = made(partials, 48000.0, Quality::live),
                     two = made(partials, 48000.0, Quality::live);
    CHECK(one.delay == two.delay);
    CHECK(one.thiran == two.thiran);
    CHECK(one.gain == two.gain);
    REQUIRE(one.sections.size() == two.sections.size());
    for (std::size_t k = 0; k < one.sections.size(); ++k) {
        CHECK(one.sections[k].c0 == two.sections[k].c0);
        CHECK(one.sections[k].c1 == two.sections[k].c1);
    }
}

TEST_CASE("loop, what cannot be run is said", "[design]") {
    const auto message = [](double f1, double rate) {
        const auto loop = makeLoop(string::Partials(f1, 0.0, {}, {}, 128), {rate, Quality::live});
        return loop ? std::string("made") : loop.error().message;
    };
    CHECK(message(9000.0, 22050.0) ==
          "its first partial, 9000 Hz, is too high for a sample rate of 22050 Hz: must be at most 8820 Hz");
    CHECK(message(440.0, 0.0) == "the sample rate is 0 Hz: must be 8000 to 1000000 Hz");
    CHECK(message(0.0, 48000.0) == "the string has no first partial (0 Hz)");
    CHECK(message(8800.0, 22050.0) == "made");
}
