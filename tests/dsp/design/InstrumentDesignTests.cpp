#include "dsp/design/InstrumentDesign.h"

#include "dsp/analysis/Measure.h"
#include "tests/support/Worse.h"

#include <catch2/catch.hpp>

#include <cmath>
#include <iostream>
#include <string>
#include <vector>

using namespace hitchpin;
using namespace hitchpin::design;

namespace {

constexpr double firstPartialCents = 0.05;

string::Strung wire(double lengthM, double diameterM, double firstPartialHz) {
    string::Description description;
    description.speakingLength = lengthM;
    description.build.core = {*string::findBuiltInMaterial("music wire"), diameterM};
    auto strung = string::strungToPitch(description, firstPartialHz);
    REQUIRE(strung);
    return *std::move(strung);
}

/// Two fretted courses of a pair each and one open string over a pair of bridges.
InstrumentDescription instrument() {
    InstrumentDescription description;
    description.name = "test";
    description.boards = {{board::BridgeKind::resistance, {{400.0}}, {}}, {}};
    description.bridges = {{"yielding", 0}, {"rigid", 1}};
    CourseDescription low, middle, high;
    low.name = "A2";
    low.key = 45;
    low.strings = {wire(0.65, 0.0006, 110.0), wire(0.65, 0.0006, 110.05)};
    low.frets = 7;
    middle = low;
    middle.name = "E4";
    middle.key = 64;
    middle.strings = {wire(0.65, 0.00025, 329.6276), wire(0.65, 0.00025, 329.5)};
    middle.pluckRatio = 0.15;
    high.name = "A5";
    high.key = 81;
    high.strings = {wire(0.25, 0.0003, 880.0)};
    high.bridge = 1;
    high.hasDamper = true;
    description.courses = {low, middle, high};
    return description;
}

std::string failureOf(const InstrumentDescription& description, const LoopSettings& settings = {}) {
    const auto made = makeInstrument(description, settings);
    return made ? std::string("made") : made.error().message;
}

} // namespace

TEST_CASE("instrument, every string at every stop", "[design]") {
    const InstrumentDescription description = instrument();
    const auto made = makeInstrument(description, {48000.0, Quality::live});
    REQUIRE(made);
    const InstrumentDesign& design = **made;
    CHECK(design.sampleRate == 48000.0);
    REQUIRE(design.boards.size() == 2);
    CHECK(design.boards[0].points[0].resistance == 400.0);
    REQUIRE(design.courses.size() == 3);
    REQUIRE(design.strings.size() == 5);
    CHECK(design.courses[1].firstString == 2);
    CHECK(design.courses[1].stringCount == 2);
    CHECK(design.courses[1].pluckRatio == 0.15);
    CHECK(design.courses[2].hasDamper);
    CHECK(design.strings[4].board == 1);

    double worst = 0.0, longest = 0.0;
    for (std::size_t c = 0; c < design.courses.size(); ++c) {
        const auto& course = design.courses[c];
        for (int s = 0; s < course.stringCount; ++s) {
            const StringDesign& string = design.strings[static_cast<std::size_t>(course.firstString + s)];
            const auto& strung = description.courses[c].strings[static_cast<std::size_t>(s)];
            CHECK(string.course == static_cast<int>(c));
            CHECK(string.impedance == strung.statics.impedance);
            REQUIRE(string.stops.size() == static_cast<std::size_t>(course.frets + 1));
            for (std::size_t stop = 0; stop < string.stops.size(); ++stop) {
                const SpeakingString& speaking = string.stops[stop];
                // x_n = L·(1 − 2^(−n/12)) from the nut: what is left speaks.
                const double length =
                    strung.description.speakingLength * std::exp2(-static_cast<double>(stop) / 12.0);
                CHECK(std::abs(speaking.speakingLength - length) < 1e-12);
                CHECK(std::abs(speaking.tension / strung.statics.tension - 1.0) < 1e-12);
                const auto stopped =
                    stop == 0 ? strung
                              : *string::stoppedAt(strung, std::exp2(-static_cast<double>(stop) / 12.0));
                const auto& loop = speaking.loop;
                REQUIRE(!loop.accuracy.partials.empty());
                CHECK(std::abs(analysis::centsBetween(loop.firstPartialHz, stopped.partials.frequency(1))) <
                      1e-9);
                CHECK(std::abs(loop.accuracy.partials.front().cents) <= firstPartialCents);
                CHECK(loop.accuracy.peakLoopGain < 1.0);
                worst = support::worse(worst, loop.accuracy.worstCents);
                longest = std::max(longest, stopped.partials.t60(1));
            }
        }
    }
    CHECK(design.longestT60 == longest);
    std::cout << "instrument of 33 loops: worst covered partial " << worst << " cents\n";
    CHECK(worst <= 1.0);
}

TEST_CASE("instrument, progress rises to one and can cancel", "[design]") {
    const InstrumentDescription description = instrument();
    std::vector<double> shares;
    const auto made = makeInstrument(description, {}, [&](double share) {
        shares.push_back(share);
        return true;
    });
    REQUIRE(made);
    REQUIRE(shares.size() == 34);
    CHECK(shares.front() == 0.0);
    CHECK(shares.back() == 1.0);
    CHECK(std::is_sorted(shares.begin(), shares.end()));

    int calls = 0;
    const auto cancelled = makeInstrument(description, {}, [&](double) { return ++calls < 3; });
    REQUIRE(!cancelled);
    CHECK(cancelled.error().message == "cancelled");
    CHECK(calls == 3);
}

TEST_CASE("instrument, a string that would break still sounds", "[design]") {
    InstrumentDescription description = instrument();
    description.courses[2].strings = {wire(1.0, 0.0003, 880.0)};
    REQUIRE(description.courses[2].strings[0].statics.breakingShare > 1.0);
    CHECK(failureOf(description) == "made");
}

TEST_CASE("instrument, failures name the course", "[design]") {
    InstrumentDescription description = instrument();
    description.courses[2].strings = {wire(0.02, 0.0003, 9000.0)};
    CHECK(failureOf(description, {22050.0, Quality::live}) ==
          "courses[2] (A5): its first partial, 9000 Hz, is too high for a sample rate of 22050 Hz: must be "
          "at most 8820 Hz");
    // A fret can be too high where the open string is not.
    description = instrument();
    description.courses[1].strings = {wire(0.65, 0.00025, 329.6276), wire(0.02, 0.00025, 7500.0)};
    const std::string message = failureOf(description, {22050.0, Quality::live});
    INFO(message);
    CHECK(message.rfind("courses[1] (E4), string 2, fret 3: its first partial, ", 0) == 0);

    description = instrument();
    description.courses[0].bridge = 2;
    CHECK(failureOf(description) == "courses[0] (A2): stands on a bridge that the instrument does not have");
    description = instrument();
    description.courses[1].strings.clear();
    CHECK(failureOf(description) == "courses[1] (E4): has no strings");
    description = instrument();
    description.boards[0].points[0].resistance = 0.0;
    CHECK(failureOf(description) == "boards[0]: its resistance must be over 0 kg/s at each point");
    CHECK(failureOf({}) == "the instrument has no courses");
}
