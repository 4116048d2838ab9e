// The schedule as people and programs read it.
#include "Source/document/JsonText.h"
#include "Source/report/Schedule.h"

#include <catch2/catch.hpp>
#include <juce_core/juce_core.h>

#include <algorithm>

using namespace hitchpin;

namespace {

report::Schedule schedule(const juce::String& courses) {
    const auto read = document::parse(R"({"format": "hitchpin-instrument", "version": 1, "name": "Test, \"quoted\"", "courses": [)" + courses + "]}");
    if (!read)
        FAIL(read.error().front().message);
    const auto described = document::describe(*read);
    REQUIRE(described);
    return report::makeSchedule(*read, *described);
}

juce::String wire(const char* note, double length, double diameter, const char* material = "music wire") {
    return "{\"note\": \"" + juce::String(note) + "\", \"speaking_length_mm\": " + juce::String(length) +
           ", \"core\": {\"material\": \"" + material + "\", \"diameter_mm\": " + juce::String(diameter) + "}}";
}

bool marked(const std::vector<std::string>& warnings, const char* what) {
    return std::any_of(warnings.begin(), warnings.end(), [&](const auto& w) { return w.find(what) != std::string::npos; });
}

} // namespace

// T = 4μL²f1²/(1+B) and so on are checked in dsp; here it is that the row says what the string is.
TEST_CASE("A row holds the string's figures and the totals add up", "[report]") {
    const auto s = schedule(wire("C4", 620, 1.0) + "," + wire("A3", 700, 1.0));
    REQUIRE(s.courses.size() == 2);
    const auto& row = s.courses[0];
    CHECK(row.note == "C4");
    CHECK(row.pitchHz == Approx(261.6256).margin(1e-4));
    CHECK(row.tensionN == Approx(648.9).epsilon(0.005)); // but for stiffness and stretch
    CHECK(row.breakingShare == Approx(row.tensionN / row.breakingLoadN));
    CHECK(row.workingShare == 0.70);
    CHECK(row.partialsHz.size() == report::partialsListed);
    CHECK(row.decayT60S.size() == report::partialsListed);
    CHECK(s.totalTensionN == Approx(s.courses[0].courseTensionN + s.courses[1].courseTensionN));
    CHECK(s.tensionByBridgeN.front().second == Approx(s.totalTensionN));
}

TEST_CASE("The JSON has the agreed keys and full precision", "[report]") {
    const auto s = schedule(wire("C4", 620, 1.0));
    const auto json = document::parseCheckedJson(report::toJson(s));
    const auto course = json["courses"][0];
    for (const char* key : {"note", "pitch_hz", "strings", "speaking_length_mm", "core", "windings", "outer_diameter_mm",
                            "linear_density_kg_m", "tension_n", "course_tension_n", "stress_mpa", "breaking_load_n",
                            "breaking_share", "working_share", "semitones_to_breaking", "stretch_mm", "inharmonicity",
                            "impedance_kg_s", "longitudinal_hz", "partials_hz", "decay_t60_s", "warnings"}) {
        CAPTURE(key);
        CHECK(course.hasProperty(key));
    }
    CHECK(json.hasProperty("total_tension_n"));
    CHECK(json.hasProperty("warnings"));
    CHECK(static_cast<double>(course["tension_n"]) == s.courses[0].tensionN);
    CHECK(static_cast<double>(course["inharmonicity"]) == s.courses[0].inharmonicity);
}

TEST_CASE("The CSV has one row a course under a header with units", "[report]") {
    const auto csv = juce::StringArray::fromLines(juce::String::fromUTF8(report::toCsv(schedule(wire("C4", 620, 1.0) + "," + wire("A3", 700, 1.0))).c_str()));
    CHECK(csv[0].startsWith("note,pitch_hz,strings,speaking_length_mm"));
    CHECK(csv[1].startsWith("C4,"));
    CHECK(csv[2].startsWith("A3,"));
    const auto cells = [](const juce::String& line) { return juce::StringArray::fromTokens(line, ",", "\"").size(); };
    CHECK(cells(csv[1]) == cells(csv[0]));
}

// Plain-string stress does not depend on gauge: a thicker string is never advised.
TEST_CASE("Strings near and over breaking are marked with what helps", "[report]") {
    const auto over = schedule(wire("A4", 900, 0.6));
    REQUIRE_FALSE(over.courses[0].warnings.empty());
    CHECK(over.courses[0].warnings[0].find("would break: 1360 N on a breaking load of 666 N, 6.2 semitones over") == 0);
    CHECK(marked(over.warnings, "eye protection"));
    const auto near = schedule(wire("A4", 560, 0.6));
    CHECK(marked(near.courses[0].warnings, "over the usual working share"));
    const auto fine = schedule(wire("A4", 380, 0.6));
    CHECK(fine.courses[0].warnings.empty());
    CHECK_FALSE(marked(fine.warnings, "eye protection"));
    CHECK(marked(fine.warnings, "not a structural approval"));
    for (const auto& s : {over, near})
        for (const auto& warning : s.courses[0].warnings)
            CHECK(warning.find("take a thicker") == std::string::npos);
    // The length and the pitch that are advised hold.
    const juce::String advice(over.courses[0].warnings[0]);
    const int length = advice.fromFirstOccurrenceOf("may speak ", false, false).getIntValue();
    CHECK(schedule(wire("A4", length, 0.6)).courses[0].breakingShare == Approx(0.70).margin(0.003));
    CHECK(schedule(wire("A4", length, 0.6)).courses[0].breakingShare <= 0.70);
}

TEST_CASE("Slack strings and jumps at a break are marked", "[report]") {
    CHECK(marked(schedule(wire("A2", 500, 0.8, "nylon")).courses[0].warnings, "very slack"));
    CHECK(marked(schedule(wire("A3", 600, 0.5) + "," + wire("B3", 560, 0.7, "yellow brass")).warnings, "tension jumps"));
}

TEST_CASE("The table gives honest digits", "[report]") {
    const auto table = report::toTable(schedule(wire("C4", 620, 1.0)));
    CHECK(table.find("261.63") != std::string::npos);
    CHECK(table.find(" 646 ") != std::string::npos);
    CHECK(table.find("646.") == std::string::npos);
}
