// Strings on a board: the poles of loops and junction against masses and springs that know neither.
#include "dsp/board/OnBoard.h"
#include "dsp/design/CoupledPoles.h"
#include "tests/support/PlainInstruments.h"
#include "tests/support/RitzInstrument.h"

#include <catch2/catch.hpp>

#include <cmath>
#include <iomanip>
#include <iostream>
#include <numbers>
#include <random>

using namespace hitchpin;
using support::RealString;

namespace {

constexpr double pi = std::numbers::pi;
/// The goals: poles that ring this long at least, s, within so much.
constexpr double shortestT60 = 0.05, mostCents = 0.5, mostDecay = 0.03;

/// Modes as tap tones show them: the lowest near 100 Hz, ever closer, Q 20…45, mobility peaks of some hundredths s/kg.
board::Board soundboard(int modes, int points, unsigned seed) {
    std::mt19937 random(seed);
    std::uniform_real_distribution<double> unit(0.0, 1.0);
    board::Board board = support::plainBoard(board::BridgeKind::soundboard, points, 150.0);
    for (int i = 0; i < modes; ++i) {
        board::Mode mode;
        mode.frequency = 95.0 + 1500.0 * std::pow((i + 0.6 * unit(random)) / 20.0, 1.2);
        mode.q = 20.0 + 25.0 * unit(random);
        mode.mass = 0.1 + 0.3 * unit(random);
        mode.angle = (70.0 + 25.0 * unit(random)) * pi / 180.0;
        for (int p = 0; p < points; ++p)
            mode.shape.push_back(points == 1 ? 1.0 : std::cos(pi * (i % 4) * (p + 0.3) / points));
        board.modes.push_back(mode);
    }
    return board;
}

/// Where a course stands, worked out here: the points of the bridges follow each other, evenly spread over each.
board::Sharing placeOf(const design::InstrumentDescription& instrument, const design::CourseDescription& course) {
    const auto bridge = static_cast<std::size_t>(course.bridge);
    board::Sharing place;
    for (std::size_t b = 0; b < bridge; ++b)
        place.first += instrument.bridges[b].points;
    const int gaps = instrument.bridges[bridge].points - 1;
    for (double along = course.bridgePosition * gaps; along > 0.0; along -= 1.0) {
        place.ofSecond = std::min(along, 1.0);
        place.ofFirst = 1.0 - place.ofSecond;
        place.first += along > 1.0 ? 1 : 0;
    }
    return place;
}

struct Worst {
    double cents = 0.0, decay = 0.0;
    int poles = 0;
};

/// Each pole of the oracle up to `highestHz` beside the nearest of the bridge equation.
Worst compare(const design::InstrumentDescription& instrument, double sampleRate, int terms, double highestHz) {
    const auto made = design::makeInstrument(instrument, {sampleRate, design::Quality::reference});
    REQUIRE(made);
    const auto ours = design::coupledPoles(**made, 0, 1.2 * highestHz);
    CHECK(ours.notSettled == 0);
    std::vector<support::RitzString> strings;
    for (const auto& course : instrument.courses)
        for (const auto& string : course.strings) {
            support::RitzString ritz{string.description.speakingLength, string.statics.tension,
                                     string.statics.linearDensity, string.statics.bendingStiffness, {},
                                     placeOf(instrument, course)};
            for (int n = 1; n <= terms; ++n)
                ritz.decayRates.push_back(string.partials.decayRate(n));
            strings.push_back(std::move(ritz));
        }
    Worst worst;
    for (const auto& pole : support::ritzPoles(instrument.boards.front(), strings)) {
        const double hz = pole.imag() / (2.0 * pi), decay = -pole.real();
        if (hz > highestHz || std::log(1000.0) / decay < shortestT60)
            continue;
        double nearest = 1e9, cents = 0.0, off = 0.0;
        for (const auto& own : ours.poles) {
            const double distance = std::hypot(2.0 * pi * (own.frequency - hz), own.decayRate - decay);
            if (distance < nearest) {
                nearest = distance;
                cents = 1200.0 * std::log2(own.frequency / hz);
                off = own.decayRate / decay - 1.0;
            }
        }
        ++worst.poles;
        if (std::abs(cents) > mostCents || std::abs(off) > mostDecay)
            UNSCOPED_INFO(hz << " Hz, " << decay << " 1/s: " << cents << " cent, " << off);
        worst.cents = std::max(worst.cents, std::abs(cents));
        worst.decay = std::max(worst.decay, std::abs(off));
    }
    return worst;
}

void report(const std::string& what, const Worst& worst) {
    std::cout << std::left << std::setw(44) << what << std::right << std::setw(5) << worst.poles << " poles: worst "
              << std::setprecision(3) << worst.cents << " cent (goal " << mostCents << "), decay "
              << 100.0 * worst.decay << " % (goal " << 100.0 * mostDecay << ")\n";
    CHECK(worst.poles > 0);
    CHECK(worst.cents <= mostCents);
    CHECK(worst.decay <= mostDecay);
}

} // namespace

// Turned red by: mobility for impedance, a shape not squared, the angle's cosine for its sine, 1 − L over 1 + L.
TEST_CASE("One string on a board has the poles of its masses and springs", "[design][board]") {
    for (const int modes : {1, 5, 20}) {
        const auto instrument =
            support::realDescription({RealString{"music wire", 0.65, 0.4e-3, 196.0}}, soundboard(modes, 1, 7u));
        report("one wire, board of " + std::to_string(modes), compare(instrument, 48000.0, 48, 3000.0));
    }
    for (const int points : {2, 5}) {
        auto instrument =
            support::realDescription({RealString{"nylon", 0.62, 0.8e-3, 146.8}}, soundboard(20, points, 11u));
        instrument.courses.front().bridgePosition = 0.37;
        report("one nylon string, 20 modes, " + std::to_string(points) + " points", compare(instrument, 48000.0, 48, 3000.0));
    }
}

TEST_CASE("Twelve strings on a board have the poles of their masses and springs", "[design][board]") {
    std::vector<RealString> strings;
    for (int i = 0; i < 12; ++i) {
        const double hz = 110.0 * std::exp2((i % 2 == 0 ? i : i - 1) * 2.0 / 12.0) * (i % 2 == 0 ? 1.0 : 1.0004);
        strings.push_back({"music wire", 0.9 * std::pow(110.0 / hz, 0.85), 0.45e-3, hz, 45 + i});
    }
    for (const int modes : {1, 5, 20}) {
        auto instrument = support::realDescription(strings, soundboard(modes, modes == 20 ? 3 : 1, 5u));
        for (std::size_t i = 0; i < instrument.courses.size(); ++i)
            instrument.courses[i].bridgePosition = (static_cast<double>(i) + 0.5) / 12.0;
        report("twelve wires, board of " + std::to_string(modes), compare(instrument, 48000.0, 14, 800.0));
    }
}

// Turned red by: a bridge whose points begin at the board's first, one resistance for all of a board's points.
TEST_CASE("Two bridges on one board have the poles of their masses and springs", "[design][board]") {
    std::vector<RealString> strings;
    for (int i = 0; i < 8; ++i) {
        const double hz = 123.5 * std::exp2((i - i % 2) * 2.0 / 12.0) * (i % 2 == 0 ? 1.0 : 1.0004);
        strings.push_back({"music wire", 0.9 * std::pow(110.0 / hz, 0.85), 0.45e-3, hz, 45 + i});
        strings.back().bridge = i % 2; // a string of much the same pitch on each
    }
    for (const int modes : {3, 8, 20}) {
        auto instrument = support::realDescription(strings, soundboard(modes, 3, 17u));
        board::Board& board = instrument.boards.front();
        board.points.clear();
        instrument.bridges = {board::addBridge("first", 0, board, 1, 90.0), board::addBridge("second", 0, board, 2, 150.0)};
        for (std::size_t i = 0; i < instrument.courses.size(); ++i)
            instrument.courses[i].bridgePosition = (static_cast<double>(i) + 0.5) / 8.0;
        report("eight wires on two bridges, board of " + std::to_string(modes), compare(instrument, 48000.0, 16, 800.0));
    }
}

// Turned red by: the bridge's impedance for its mobility, 1/τ for 2/τ, the mode's own pole taken for the string's.
TEST_CASE("A partial on the board is the pole of the bridge equation", "[board]") {
    // The closed form takes the spacing of partials as steady: true to the square of the shift over the partial.
    constexpr double cents = 0.02, decay = 0.01;
    const auto instrument =
        support::realDescription({RealString{"music wire", 0.65, 0.4e-3, 196.0}}, soundboard(20, 1, 7u));
    const auto made = design::makeInstrument(instrument, {48000.0, design::Quality::reference});
    REQUIRE(made);
    const auto coupled = design::coupledPoles(**made, 0, 3000.0);
    const auto& string = instrument.courses.front().strings.front();
    double worstCents = 0.0, worstDecay = 0.0;
    for (int n = 1; n <= 12; ++n) {
        const auto ours = board::partialOnBoard(string.partials, string.statics.impedance,
                                                design::mobilityFor(instrument, 0, 0), n);
        double nearest = 1e9, off = 0.0, ring = 0.0;
        for (const auto& pole : coupled.poles)
            if (const double distance = std::hypot(2.0 * pi * (pole.frequency - ours.frequency), pole.decayRate - ours.decayRate);
                distance < nearest) {
                nearest = distance;
                off = 1200.0 * std::log2(ours.frequency / pole.frequency);
                ring = ours.decayRate / pole.decayRate - 1.0;
            }
        worstCents = std::max(worstCents, std::abs(off));
        worstDecay = std::max(worstDecay, std::abs(ring));
    }
    std::cout << "closed form of one string on a board: worst " << worstCents << " cent (allowed " << cents << "), decay "
              << 100.0 * worstDecay << " % (allowed " << 100.0 * decay << ")\n";
    CHECK(worstCents <= cents);
    CHECK(worstDecay <= decay);
}
