// From the workshop's units to physics.
#include "Source/document/Document.h"
#include "Source/report/Schedule.h"
#include "dsp/analysis/Measure.h"

#include "Source/report/Schedule.h"
#include "dsp/board/OnBoard.h"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <ctime>
#include <iostream>

using namespace hitchpin;
using hitchpin::analysis::centsBetween;

namespace {

document::Described described(const juce::String& courses, const juce::String& top = {},
                              const document::Adjustments& adjustments = {}) {
    auto read = document::parse(R"({"format": "hitchpin-instrument", "version": 1, )" + top + "\"courses\": [" + courses + "]}");
    if (!read)
        FAIL(read.error().front().message);
    auto result = document::describe(*read, adjustments);
    if (!result)
        FAIL(result.error().front().message);
    return std::move(result).value();
}

juce::String course(const juce::String& pitch, const juce::String& rest = {}) {
    return "{" + pitch + R"(, "speaking_length_mm": 650, "core": {"material": "music wire", "diameter_mm": 0.4})" + rest + "}";
}

double first(const document::Described& d, std::size_t at = 0, std::size_t string = 0) {
    return d.instrument.courses.at(at).strings.at(string).partials.frequency(1);
}
constexpr double exact = 1e-6; // cents

} // namespace

TEST_CASE("Pitch is given by note, in hertz or by tension", "[document]") {
    CHECK(std::abs(centsBetween(first(described(course(R"("note": "A3")"))), 220.0)) < exact);
    CHECK(std::abs(centsBetween(first(described(course(R"("note": "A3")", R"(, "cents": -30)"))), 220.0) + 30.0) < exact);
    CHECK(std::abs(centsBetween(first(described(course(R"("pitch_hz": 201.5)"))), 201.5)) < exact);
    const auto byTension = described(course(R"("tension_n": 80)"));
    CHECK(byTension.instrument.courses[0].strings[0].statics.tension == Approx(80.0).epsilon(1e-12));
    CHECK(byTension.instrument.courses[0].openHz == Approx(first(byTension)).epsilon(1e-9));
}

TEST_CASE("Tuning, temperament and offsets reach the strings", "[document]") {
    const auto d = described(course(R"("note": "E4")") + "," + course(R"("note": "C4")"),
                             R"("tuning": {"a4_hz": 415, "temperament": "quarter-comma meantone"}, )");
    CHECK(centsBetween(first(d, 0), first(d, 1)) == Approx(386.3137).margin(1e-3));
    const auto moved = described(course(R"("note": "A3")"), R"("tuning": {"a4_hz": 442}, )");
    CHECK(std::abs(centsBetween(first(moved), 221.0)) < exact);
}

TEST_CASE("Stretched octaves follow the strings' own inharmonicity", "[document]") {
    const auto stiff = [](const char* note, int length) {
        return juce::String("{\"note\": \"") + note + "\", \"speaking_length_mm\": " + juce::String(length) +
               R"(, "core": {"material": "music wire", "diameter_mm": 1.0}})";
    };
    const auto d = described(stiff("A4", 380) + "," + stiff("A5", 195), R"("tuning": {"stretch": "octaves 4:2"}, )");
    const auto& low = d.instrument.courses[0].strings[0].partials;
    const auto& high = d.instrument.courses[1].strings[0].partials;
    CHECK(std::abs(centsBetween(high.frequency(2), low.frequency(4))) < 0.01); // B moves with the stretch: iterated
    CHECK(std::abs(centsBetween(low.frequency(1), 440.0)) < exact);
}

TEST_CASE("Strings of a course may be detuned or differ", "[document]") {
    const auto d = described(course(R"("note": "A3")", R"(, "strings": 2, "detune_cents": [0, 1.5])"));
    CHECK(centsBetween(first(d, 0, 1), first(d, 0, 0)) == Approx(1.5).margin(exact));
    const auto each = described(course(R"("note": "A3")", R"(, "strings": 2, "each": [{}, {"core": {"diameter_mm": 0.45}}])"));
    CHECK(each.instrument.courses[0].strings[1].description.build.core.diameter == Approx(0.45e-3));
    CHECK(each.instrument.courses[0].strings[1].description.build.core.material.name == "music wire");
    CHECK(std::abs(centsBetween(first(each, 0, 1), first(each, 0, 0))) < exact);
}

// ΔT = −E·S·(α − α_frame)·Δθ on a string tuned at 20 °C.
TEST_CASE("The climate moves a tuned string", "[document]") {
    const auto cold = described(course(R"("note": "A3")"));
    const auto warm = described(course(R"("note": "A3")"), R"("climate": {"temperature_c": 30}, )");
    const auto& s = cold.instrument.courses[0].strings[0].statics;
    const double expected = -200e9 * M_PI / 4.0 * 0.16e-6 * 11.5e-6 * 10.0;
    CHECK(warm.instrument.courses[0].strings[0].statics.tension - s.tension == Approx(expected).epsilon(1e-6));
    const auto turned = described(course(R"("note": "A3")"), {}, {1.0, 1.0, 10.0, 0.0});
    CHECK(first(turned) == Approx(first(warm)).epsilon(1e-12));
}

TEST_CASE("What a host turns acts after tuning", "[document]") {
    const double neutral = first(described(course(R"("note": "A3")")));
    CHECK(centsBetween(first(described(course(R"("note": "A3")"), {}, {1.0, 1.0, 0.0, 50.0})), neutral) == Approx(50.0).margin(exact));
    // T×4 is an octave but for stretch and stiffness, L×½ another.
    CHECK(centsBetween(first(described(course(R"("note": "A3")"), {}, {4.0, 1.0, 0.0, 0.0})), neutral) == Approx(1200.0).margin(10.0));
    CHECK(centsBetween(first(described(course(R"("note": "A3")"), {}, {1.0, 0.5, 0.0, 0.0})), neutral) == Approx(1200.0).margin(1.0));
}

TEST_CASE("A pluck point that is turned is designed, and known to be", "[document]") {
    const auto turned = described(course(R"("note": "A3", "pluck_ratio": 0.2)"), {}, {1.0, 1.0, 0.0, 0.0, 0.05});
    CHECK(turned.instrument.courses[0].pluckRatio == Approx(0.25));
    CHECK(turned.rules.pluckPointOffset == 0.05);
    CHECK(described(course(R"("note": "A3", "pluck_ratio": 0.2)"), {}, {1.0, 1.0, 0.0, 0.0, -0.5}).instrument.courses[0].pluckRatio == 0.02);
}

TEST_CASE("Every key strung fills the gaps between courses", "[document]") {
    const auto d = described(course(R"("note": "C4")") + R"(,{"note": "C5", "speaking_length_mm": 330, "core": {"material": "music wire", "diameter_mm": 0.3}})",
                             R"("playing": {"notes": "every key strung"}, )");
    REQUIRE(d.instrument.courses.size() == 13);
    for (std::size_t i = 0; i < 13; ++i) {
        const auto& c = d.instrument.courses[i];
        CHECK(c.key == 60 + static_cast<int>(i));
        CHECK(std::abs(centsBetween(c.strings[0].partials.frequency(1), 440.0 * std::exp2((c.key - 69) / 12.0))) < exact);
        if (i > 0)
            CHECK(c.strings[0].description.speakingLength < d.instrument.courses[i - 1].strings[0].description.speakingLength);
    }
}

TEST_CASE("What the sound does not follow yet is said", "[document]") {
    const auto says = [](const document::Described& d, const char* what) {
        return std::any_of(d.notHeardYet.begin(), d.notHeardYet.end(), [&](const auto& s) { return s.find(what) != std::string::npos; });
    };
    CHECK(described(course(R"("note": "A3")")).notHeardYet.empty());
    CHECK(says(described(course(R"("note": "A3")"), R"("playing": {"with": "bow"}, )"), "bow"));
}

TEST_CASE("Strings are tuned on the board by their tension", "[document]") {
    // A resonance above pulls the string down, so that it has to be tuned higher by itself, and the other way round.
    const auto board = [](double hz, double kg, const char* tuned = "on the board") {
        return juce::String(R"("tuning": {"tuned": ")") + tuned + R"("}, "bridges": [{"kind": "soundboard", "resistance_kg_s": 200, "modes": [{"frequency_hz": )" +
               juce::String(hz) + R"(, "q": 30, "mass_kg": )" + juce::String(kg) + "}]}], ";
    };
    const auto onBoard = [](const document::Described& d) {
        const auto& string = d.instrument.courses[0].strings[0];
        return board::partialOnBoard(string.partials, string.statics.impedance, design::mobilityFor(d.instrument, 0, 0), 1);
    };
    for (const double hz : {180.0, 250.0}) {
        const auto tuned = described(course(R"("note": "A3")"), board(hz, 0.3));
        CHECK(std::abs(centsBetween(onBoard(tuned).frequency, 220.0)) < exact);
        CHECK((first(tuned) > 220.0) == (hz > 220.0));
        CHECK(std::abs(centsBetween(first(tuned), 220.0)) > 0.5);
        CHECK(centsBetween(220.0, first(tuned)) == Approx(onBoard(tuned).shift).margin(exact));
        const auto alone = described(course(R"("note": "A3")"), board(hz, 0.3, "alone"));
        CHECK(std::abs(centsBetween(first(alone), 220.0)) < exact);
    }
    // Right on a light resonance no tension would do: a wolf, tuned alone and said so.
    const auto wolf = described(course(R"("note": "A3")"), board(220.0, 0.02));
    CHECK(std::abs(centsBetween(first(wolf), 220.0)) < exact);
    const auto read = document::parse(R"({"format": "hitchpin-instrument", "version": 1, )" + board(220.0, 0.02) +
                                      R"("courses": [)" + course(R"("note": "A3")") + "]}");
    REQUIRE(read);
    const auto warnings = report::makeSchedule(*read, wolf).courses[0].warnings;
    CHECK(std::any_of(warnings.begin(), warnings.end(), [](const auto& w) { return w.rfind("wolf: the board's resonance at 220 Hz", 0) == 0; }));
}

TEST_CASE("Bridges on one board share its points and modes", "[document]") {
    const auto of = [](const char* shape) {
        return described(course(R"("note": "A3")", R"(, "bridge": "bass", "bridge_position": 0.25)") + "," +
                             course(R"("note": "C4")", R"(, "bridge": "long", "bridge_position": 0.5)") + "," +
                             course(R"("note": "E4")", R"(, "bridge": "post")"),
                         R"("bridges": [{"name": "bass", "kind": "soundboard", "points": 2, "resistance_kg_s": 200,
                             "modes": [{"frequency_hz": 180, "q": 30, "mass_kg": 0.3)" + juce::String(shape) + R"(}]},
                             {"name": "post"},
                             {"name": "long", "kind": "soundboard", "board": "bass", "points": 3, "resistance_kg_s": 300}], )");
    };
    const auto d = of(R"(, "shape": [1, 0.8, -0.2, -0.4, -0.6])");
    const auto& instrument = d.instrument;
    REQUIRE(instrument.boards.size() == 2);
    REQUIRE(instrument.bridges.size() == 3);
    const auto& board = instrument.boards[0];
    REQUIRE(board.points.size() == 5);
    CHECK(board.points[1].resistance == 200.0);
    CHECK(board.points[2].resistance == 300.0);
    CHECK(board.points[3].along == 0.5);
    CHECK(instrument.boards[1].kind == board::BridgeKind::rigid);
    CHECK(instrument.bridges[2].board == 0);
    CHECK(instrument.bridges[2].firstPoint == 2);
    CHECK(board::shapeAt(board.modes[0], board::sharing(instrument.bridges[0], 0.25)) == Approx(0.95));
    CHECK(board::shapeAt(board.modes[0], board::sharing(instrument.bridges[2], 0.75)) == Approx(-0.5));
    CHECK(of("").instrument.boards[0].modes[0].shape == std::vector<double>(5, 1.0));
    // Each is in tune on the board that both stand on, the other at rest there.
    for (std::size_t c = 0; c < 2; ++c) {
        const auto& string = instrument.courses[c].strings[0];
        const auto onBoard = board::partialOnBoard(string.partials, string.statics.impedance, design::mobilityFor(instrument, c, 0), 1);
        CHECK(std::abs(centsBetween(onBoard.frequency, 440.0 * std::exp2((instrument.courses[c].key - 69) / 12.0))) < exact);
        CHECK(std::abs(onBoard.shift) > 0.1);
    }
}

TEST_CASE("A thousand courses are scheduled in under a second", "[document]") {
    juce::String plain, wound;
    for (int i = 0; i < 1000; ++i) {
        const auto start = "{\"pitch_hz\": " + juce::String(60.0 + 0.3 * i) + ", \"speaking_length_mm\": " + juce::String(900.0 - 0.5 * i) +
                           R"(, "core": {"material": "music wire", "diameter_mm": 0.6})";
        plain << (i == 0 ? "" : ",") << start << "}";
        wound << (i == 0 ? "" : ",") << start << R"(, "windings": [{"material": "copper", "diameter_mm": 0.3, "bare_mm": [10, 12]}]})";
    }
    for (const auto& [kind, courses] : {std::pair{"plain", plain}, {"wound with bare ends", wound}}) {
        const auto text = R"({"format": "hitchpin-instrument", "version": 1, "courses": [)" + courses + "]}";
        const std::clock_t began = std::clock(); // of this process: other work on the machine does not count
        const auto read = document::parse(text);
        REQUIRE(read);
        const auto d = document::describe(*read, {}, report::partialsForSchedule);
        REQUIRE(d);
        const auto schedule = report::makeSchedule(*read, *d);
        const auto table = report::toTable(schedule);
        const double seconds = double(std::clock() - began) / CLOCKS_PER_SEC;
        std::cout << "1,000 courses, " << kind << ": " << seconds << " s\n";
        CHECK(schedule.courses.size() == 1000);
#if defined(__OPTIMIZE__) && !defined(__SANITIZE_ADDRESS__) && !defined(__SANITIZE_THREAD__)
        CHECK(seconds < 1.0);
#endif
    }
}
