// A ringing engine handed to another design: what should be silent is, what should change does, nothing clicks.
#include "dsp/analysis/Measure.h"
#include "dsp/board/OnBoard.h"
#include "dsp/engine/Engine.h"
#include "tests/support/AllocationGuard.h"
#include "tests/support/PlainInstruments.h"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <iostream>
#include <numbers>

using namespace hitchpin;
using engine::Engine;
using support::RealString;

namespace {

constexpr double rate = 48000.0;
/// The goal for a change that should be silent, against what sounds.
constexpr double silentDb = -90.0;

board::Board wood() {
    return support::plainBoard(board::BridgeKind::soundboard, 1, 300.0,
                               {{118.0, 30.0, 0.4, 1.3, {1.0}, 0.0}, {236.0, 32.0, 0.3, 1.5, {1.0}, 0.0}});
}

std::vector<RealString> strings(double cents = 0.0, int frets = 0) {
    const double r = std::exp2(cents / 1200.0);
    return {RealString{"music wire", 1.1, 0.9e-3, 110.0 * r, 45, 1, 0.0, frets},
            RealString{"music wire", 0.65, 0.4e-3, 220.0 * r, 57, 2, 0.4},
            RealString{"nylon", 0.4, 0.8e-3, 330.0 * r, 64}};
}

std::shared_ptr<const design::InstrumentDesign> made(const std::vector<RealString>& courses, design::Quality quality) {
    auto design = design::makeInstrument(support::realDescription(courses, wood()), {rate, quality});
    REQUIRE(design);
    return *design;
}

void pluckAll(Engine& engine) {
    for (int s = 0; s < 4; ++s)
        engine.pluck(s, {1.0, 0.13 + 0.05 * s, 0.002, 1.1});
}

std::vector<double> rendered(Engine& engine, double seconds) {
    std::vector<double> sound(static_cast<std::size_t>(seconds * rate));
    engine.process(sound.data(), nullptr, static_cast<int>(sound.size()));
    return sound;
}

/// Differences of third order: 18 dB an octave down from half the rate, so that a step or a corner stands out.
std::vector<double> highPassed(std::vector<double> x) {
    for (int order = 0; order < 3; ++order)
        for (std::size_t i = x.size(); i-- > 1;)
            x[i] = 0.5 * (x[i] - x[i - 1]);
    x.erase(x.begin(), x.begin() + 3);
    return x;
}

double peak(const std::vector<double>& x) {
    double most = 0.0;
    for (const double v : x)
        most = std::max(most, std::abs(v));
    return most;
}

double decibels(double a, double b) { return 20.0 * std::log10(std::max(a, 1e-300) / b); }

} // namespace

// Turned red by: filters that are not run in, a line copied one sample off, a release that is forgotten.
TEST_CASE("Taking over a ringing instrument of the same design is silent", "[engine][takeover]") {
    const auto design = made(strings(), design::Quality::live);
    for (const double at : {0.004, 0.7}) { // while the plucks are being sent, and long after
        Engine still(design), before(design), after(design);
        for (Engine* engine : {&still, &before})
            pluckAll(*engine);
        rendered(still, at);
        rendered(before, at);
        REQUIRE(after.takeOver(before));
        const auto expected = rendered(still, 1.5), heard = rendered(after, 1.5);
        std::vector<double> difference(expected.size());
        std::transform(heard.begin(), heard.end(), expected.begin(), difference.begin(), std::minus<>());
        const double off = decibels(peak(difference), peak(expected));
        std::cout << "same design after " << at << " s: " << off << " dB (goal " << silentDb << ")\n";
        CHECK(off <= silentDb);
        CHECK_FALSE(after.takingOver());
    }
}

// A reference design for a live one: true partials for those beyond what the live one covers, but no click.
TEST_CASE("A finer design takes over without a click", "[engine][takeover]") {
    const auto coarse = made(strings(), design::Quality::live), fine = made(strings(), design::Quality::reference);
    Engine still(coarse), before(coarse), after(fine);
    for (Engine* engine : {&still, &before}) {
        pluckAll(*engine);
        rendered(*engine, 0.7);
    }
    REQUIRE(after.takeOver(before));
    const auto expected = rendered(still, 0.3), heard = rendered(after, 0.3);
    // Beside what either sounds up there by itself.
    const double own = peak(highPassed(expected)), click = decibels(std::max(peak(highPassed(heard)) - own, 0.0), peak(expected));
    std::cout << "live to reference: high-passed peak over that of the undisturbed sound " << click << " dB (goal " << silentDb << ")\n";
    CHECK(click <= silentDb);
    CHECK(std::abs(decibels(peak(heard), peak(expected))) < 0.5);
}

// Turned red by: a design that only new notes follow.
TEST_CASE("Strings that ring follow their new tension", "[engine][takeover]") {
    Engine before(made(strings(), design::Quality::live)), after(made(strings(50.0), design::Quality::live));
    for (const int other : {0, 2, 3})
        before.damp(other, 0.01);
    before.pluck(1, {1.0, 0.2, 0.002, std::numbers::pi / 2.0});
    rendered(before, 0.3);
    const double energy = before.energy();
    REQUIRE(after.takeOver(before));
    std::vector<double> out(4096);
    double most = 0.0;
    for (int i = 0; i < 20; ++i) {
        after.process(out.data(), nullptr, 480);
        most = std::max(most, after.energy());
    }
    std::cout << "50 cents up while ringing: energy at most " << 10.0 * std::log10(most / energy) << " dB over what was there\n";
    CHECK(10.0 * std::log10(most / energy) < 0.5);
    // Where the board lets it sound, the other strings at rest.
    const auto description = support::realDescription(strings(50.0), wood());
    const auto& string = description.courses[1].strings[0];
    const double said = board::partialOnBoard(string.partials, string.statics.impedance,
                                              design::mobilityFor(description, 1, 0), 1).frequency;
    const auto measured = analysis::measurePartials(rendered(after, 1.0), rate, std::vector{said, 2.0 * said});
    REQUIRE(measured.front().frequency > 0.0);
    const double cents = analysis::centsBetween(measured.front().frequency, said);
    std::cout << "its new pitch is " << cents << " cent from where the board lets it sound\n";
    CHECK(std::abs(cents) < 0.1);
}

TEST_CASE("What is not alike is not taken over", "[engine][takeover]") {
    Engine before(made(strings(), design::Quality::live));
    pluckAll(before);
    rendered(before, 0.1);
    auto fewer = strings();
    fewer.pop_back();
    Engine other(made(fewer, design::Quality::live));
    CHECK_FALSE(other.takeOver(before));
    Engine fretted(made(strings(0.0, 3), design::Quality::live));
    CHECK_FALSE(fretted.takeOver(before));
    // Nor while one take-over is still going on.
    Engine next(made(strings(), design::Quality::live)), third(made(strings(), design::Quality::live));
    REQUIRE(next.takeOver(before));
    CHECK_FALSE(third.takeOver(next));
    rendered(next, 0.5);
    CHECK(third.takeOver(next));
}

TEST_CASE("Taking over asks nothing of the heap and depends on no block", "[engine][takeover]") {
    const auto design = made(strings(), design::Quality::live), other = made(strings(20.0), design::Quality::live);
    std::vector<std::vector<double>> sounds;
    for (const int block : {24000, 64, 7}) {
        Engine before(design), after(other);
        pluckAll(before);
        rendered(before, 0.2);
        std::vector<double> sound(24000);
        {
            const support::AllocationGuard guard;
            REQUIRE(after.takeOver(before));
            for (int done = 0; done < 24000; done += block)
                after.process(sound.data() + done, nullptr, std::min(block, 24000 - done));
            CHECK(guard.allocations() == 0);
            CHECK(guard.frees() == 0);
        }
        sounds.push_back(std::move(sound));
    }
    CHECK(sounds[0] == sounds[1]);
    CHECK(sounds[0] == sounds[2]);
}
