// Bad files get one message a problem, with place, value, unit and range. The texts are asserted to the letter: they
// are what a person has to go on.
#include "Source/document/Document.h"
#include "Source/document/JsonText.h"
#include "Source/document/Reference.h"

#include <catch2/catch.hpp>

#include <algorithm>

using namespace hitchpin;
using document::parse;

namespace {

/// A small good file in which a test replaces a piece.
juce::String file(const juce::String& course = {}, const juce::String& top = {}) {
    return R"({"format": "hitchpin-instrument", "version": 1, )" + top +
           R"("courses": [{"note": "A2", "speaking_length_mm": 900, "core": {"material": "music wire", "diameter_mm": 0.6})" +
           course + "}]}";
}

std::vector<std::string> problems(const juce::String& text) {
    const auto result = parse(text);
    std::vector<std::string> messages;
    if (!result)
        for (const auto& problem : result.error())
            messages.push_back(problem.message);
    return messages;
}

using Messages = std::vector<std::string>;

} // namespace

TEST_CASE("A small file is read with its defaults", "[document]") {
    const auto read = parse(file());
    REQUIRE(read);
    CHECK(read->courses.size() == 1);
    CHECK(read->tuning.a4Hz == 440.0);
    CHECK(read->playing.forceN == 2.0);
    const auto defaults = document::defaultsTaken(*read);
    const auto says = [&](const char* line) { return std::find(defaults.begin(), defaults.end(), line) != defaults.end(); };
    CHECK(says("tuning.a4_hz = 440"));
    CHECK(says("courses[].strings = 1"));
    CHECK_FALSE(says("courses[].note = "));
}

TEST_CASE("Values out of range name place, value, unit and range", "[document]") {
    const auto with = [](const char* from, const char* to) { return problems(file().replace(from, to)); };
    CHECK(with("900", "-300") == Messages{"courses[0].speaking_length_mm = -300 mm: must be over 0 and at most 10000 mm"});
    CHECK(with("900", "1e9") == Messages{"courses[0].speaking_length_mm = 1e+09 mm: must be over 0 and at most 10000 mm"});
    CHECK(with("900", "\"long\"") ==
          Messages{"courses[0].speaking_length_mm = \"long\": must be a number over 0 and at most 10000 mm"});
    CHECK(with("0.6", "0") == Messages{"courses[0].core.diameter_mm = 0 mm: must be over 0 and at most 50 mm"});
    CHECK(with("\"A2\"", "\"H2\"") ==
          Messages{"courses[0].note = \"H2\": must be a note from C-1 to G9, such as \"C4\", \"F#2\" or \"Bb3\""});
    CHECK(with("version\": 1", "version\": 2") == Messages{"version = 2: must be 1, the version this program reads"});
    CHECK(with("hitchpin-instrument", "other") == Messages{"format = \"other\": must be \"hitchpin-instrument\""});
    CHECK(with("music wire", "music wier").front().find(
              "courses[0].core.material = \"music wier\": no such material; known are aluminium, copper, gut, iron, music wire") == 0);
    CHECK(problems(file(R"(, "bridge": "mian")")) == Messages{"courses[0].bridge = \"mian\": no such bridge; known are main"});
    CHECK(problems(file(R"(, "windings": [{"material": "copper", "diameter_mm": 0.3, "bare_mm": [500, 500]}])")) ==
          Messages{"courses[0].windings[0].bare_mm = 1000 mm in all: must be under the speaking length, 900 mm"});
}

// Turned red by: a shape counted against the owner's points alone, a board found by its place in the file only.
TEST_CASE("Bridges on one board are checked together", "[document]") {
    const auto with = [](const char* second, const char* first = R"("kind": "soundboard", "points": 2)") {
        return problems(file({}, R"("bridges": [{"name": "bass", )" + juce::String(first) + R"(}, {"name": "long", )" + second + "}], "));
    };
    const char* const mode = R"("modes": [{"frequency_hz": 90, "q": 20, "mass_kg": 5}])";
    CHECK(with(R"("kind": "soundboard", "board": "bass")").empty());
    CHECK(with(R"("kind": "soundboard", "board": "bas")") ==
          Messages{"bridges[1].board = \"bas\": no such bridge; known are bass, long"});
    CHECK(with(R"("kind": "soundboard", "board": "long")") == Messages{"bridges[1].board = \"long\": must be a bridge before this one"});
    CHECK(with(R"("kind": "soundboard")", R"("kind": "soundboard", "board": "long")") ==
          Messages{"bridges[0].board = \"long\": must be a bridge before this one"});
    CHECK(with(R"("kind": "soundboard", "board": "bass")", R"("kind": "resistance")") ==
          Messages{"bridges[1].board = \"bass\": bridges[0] has no soundboard"});
    CHECK(with(R"("board": "bass")") == Messages{"bridges[1].board belongs to a bridge of kind \"soundboard\""});
    CHECK(with((R"("kind": "soundboard", "board": "bass", )" + juce::String(mode)).toRawUTF8()) ==
          Messages{"bridges[1].modes belong to the bridge whose board it is, \"bass\""});
    CHECK(with(R"("kind": "soundboard", "board": "bass"}, {"name": "third", "kind": "soundboard", "board": "long")") ==
          Messages{"bridges[2].board = \"long\": bridges[1] stands on the board of \"bass\" itself: name that"});
    const auto shaped = [&](const char* shape) {
        return with(R"("kind": "soundboard", "board": "bass", "points": 3)",
                    (R"("kind": "soundboard", "points": 2, "modes": [{"frequency_hz": 90, "q": 20, "mass_kg": 5, "shape": )" +
                     juce::String(shape) + "}]").toRawUTF8());
    };
    CHECK(shaped("[1, 0.5, 0.2, -0.1, -0.5]").empty());
    CHECK(shaped("[1, 0.5]") ==
          Messages{"bridges[0].modes[0].shape has 2 entries: must have one for each point of the bridges on its board, 5"});
    CHECK(with(R"("kind": "soundboard")",
               R"("kind": "soundboard", "modes": [{"frequency_hz": 90, "q": 20, "mass_kg": 5, "shape": [1, 1]}])") ==
          Messages{"bridges[0].modes[0].shape has 2 entries: must have one for each of the bridge's points, 1"});
    CHECK(with(R"("kind": "soundboard", "board": "bass", "points": 255)") ==
          Messages{"bridges[0]: its board has 257 points, those of all bridges on it: must be at most 256"});
}

TEST_CASE("Unknown keys are errors that name the key and the nearest known one", "[document]") {
    CHECK(problems(file(R"(, "speaking_lenght_mm": 3)")) ==
          Messages{"courses[0].speaking_lenght_mm is not a known key: did you mean speaking_length_mm?"});
    CHECK(problems(file({}, R"("zzzzzz": 1, )")).size() == 1);
    CHECK(problems(file().replace("\"note\": \"A2\", ", "")) ==
          Messages{"courses[0]: the pitch is missing: give note, pitch_hz or tension_n"});
}

// Turned red by: a reader that stops at its first problem.
TEST_CASE("All problems are said at once", "[document]") {
    const auto all = problems(file().replace("900", "-1").replace("0.6", "0").replace("\"A2\"", "\"H2\""));
    CHECK(all.size() == 3);
}

TEST_CASE("What is no JSON gets line and column", "[document]") {
    CHECK(problems("") == Messages{"the file is empty"});
    CHECK(problems("{\n  \"format\": 7.") == Messages{"line 2, column 13: digits must follow the decimal point"});
    CHECK(problems(file().replace("900", "NaN")).front().find("NaN is not a JSON value") != std::string::npos);
    CHECK(problems(file().replace("\"note\": \"A2\"", "\"note\": \"A2\", \"note\": \"A3\"")).front().find(
              "the key \"note\" stands twice in the same object") != std::string::npos);
    for (const char* text : {"[", "{", "{\"a\"", "{\"a\":", "[1,]", "{\"a\":1,}", "\"\\u12\"", "01", "-", "1e", "tru", "[1] 2", "'a'", "\"\n\"", "[1 2]"}) {
        CAPTURE(text);
        CHECK(problems(text).size() == 1);
    }
}

// Turned red by: a recursive reader without a limit, which overflows the stack.
TEST_CASE("Brackets a hundred thousand deep are refused", "[document]") {
    for (const char* bracket : {"[", "{\"a\":"}) {
        const auto message = problems(juce::String::repeatedString(bracket, 100000)).front();
        CHECK(message.find("brackets are nested more than 32 deep") != std::string::npos);
    }
}

TEST_CASE("Files that are none are refused in words", "[document]") {
    const auto folder = juce::File::createTempFile("hitchpin");
    REQUIRE(folder.createDirectory());
    const auto why = [](const juce::File& file) {
        const auto read = document::load(file);
        return read ? std::string("read") : read.error().front().message;
    };
    CHECK(why(folder) == "this is a directory, not an instrument file");
    CHECK(why(folder.getChildFile("missing.json")) == "there is no such file");
    const auto big = folder.getChildFile("big.json");
    big.replaceWithText(juce::String::repeatedString(" ", 17 << 20));
    CHECK(why(big) == "the file is over 16 MiB, more than an instrument file may have");
    const auto binary = folder.getChildFile("binary.json");
    const unsigned char bytes[] = {0xff, 0x00, 0xfe, 0x80, 0x7b};
    binary.replaceWithData(bytes, sizeof bytes);
    CHECK(why(binary) == "line 1, column 1: this is not text (UTF-8 is expected)");
    folder.deleteRecursively();
}

// Turned red by: a key that is read and not written, or written with fewer digits.
TEST_CASE("A file that uses every key is written back equal", "[document]") {
    const auto whole = juce::File(HITCHPIN_SOURCE_DIR "/tests/Source/document/every-key.json").loadFileAsString();
    const auto first = parse(whole);
    if (!first)
        for (const auto& problem : first.error())
            UNSCOPED_INFO(problem.message);
    REQUIRE(first);
    const auto written = document::toJson(*first);
    const auto second = parse(written);
    REQUIRE(second);
    CHECK(*second == *first);
    CHECK(document::toJson(*second) == written);
    // Key by key the same JSON, whatever the spaces.
    CHECK(document::jsonLine(juce::JSON::parse(written)) == document::jsonLine(juce::JSON::parse(whole)));
    // And the file does use every key that the reference lists.
    int missing = 0;
    for (const auto& line : document::keyReference())
        if (line.rfind("  ", 0) == 0) {
            const auto key = line.substr(2, line.find(':') - 2);
            if (!whole.contains("\"" + juce::String(key) + "\"")) {
                UNSCOPED_INFO("not in the file: " << key);
                ++missing;
            }
        }
    CHECK(missing == 0);
}

TEST_CASE("Saving replaces the file whole or leaves it as it was", "[document]") {
    const auto folder = juce::File::createTempFile("hitchpin");
    REQUIRE(folder.createDirectory());
    const auto target = folder.getChildFile("harp.json");
    const auto instrument = parse(file());
    REQUIRE(instrument);
    REQUIRE(document::save(*instrument, target).wasOk());
    const auto again = document::load(target);
    REQUIRE(again);
    CHECK(*again == *instrument);
    CHECK(folder.getNumberOfChildFiles(juce::File::findFilesAndDirectories) == 1);
    CHECK(document::save(*instrument, folder).failed());
    CHECK(document::save(*instrument, folder.getChildFile("no/such/folder.json")).failed());
    // A device that is full: said, and nothing renamed over it.
    CHECK(document::save(*instrument, juce::File("/dev/full")).failed());
    CHECK(juce::File("/dev/full").exists());
    folder.deleteRecursively();
}
