// The built program, called as people call it.
#include "Source/document/Document.h"

#include <catch2/catch.hpp>
#include <juce_audio_formats/juce_audio_formats.h>

#include <cmath>
#include <csignal>
#include <iostream>
#include <cstdio>
#include <sys/stat.h>
#include <sys/wait.h>
#include <unistd.h>

namespace {

struct Call {
    int exit = -1;
    juce::String out, err;
};

/// A folder of the test's own, gone with it.
struct Workshop {
    juce::File folder = juce::File::createTempFile("hitchpin-console");
    Workshop() {
        folder.createDirectory();
        chmod(folder.getFullPathName().toRawUTF8(), 0755);
    }
    ~Workshop() { folder.deleteRecursively(); }

    juce::File write(const char* name, const juce::String& text) const {
        const auto file = folder.getChildFile(name);
        file.replaceWithText(text);
        return file;
    }
    juce::File wire() const {
        return write("wire.json", R"({"format": "hitchpin-instrument", "version": 1, "name": "Wire", "courses": [
            {"note": "A2", "speaking_length_mm": 900, "core": {"material": "music wire", "diameter_mm": 0.6}},
            {"note": "E3", "speaking_length_mm": 700, "core": {"material": "music wire", "diameter_mm": 0.5}, "frets": 5}]})");
    }
    int files() const { return folder.getNumberOfChildFiles(juce::File::findFilesAndDirectories); }

    Call call(const juce::String& arguments, const juce::String& before = {}) const {
        const auto out = folder.getSiblingFile(folder.getFileName() + ".out"), err = folder.getSiblingFile(folder.getFileName() + ".err");
        const auto line = "cd " + folder.getFullPathName() + " && " + before + " " HITCHPIN_CONSOLE " " + arguments + " >" +
                          out.getFullPathName() + " 2>" + err.getFullPathName();
        Call call;
        const int status = std::system(line.toRawUTF8());
        call.exit = WIFEXITED(status) ? WEXITSTATUS(status) : 128;
        call.out = out.loadFileAsString();
        call.err = err.loadFileAsString();
        out.deleteFile();
        err.deleteFile();
        return call;
    }
};

std::unique_ptr<juce::AudioFormatReader> reader(const juce::File& file) {
    juce::AudioFormatManager formats;
    formats.registerBasicFormats();
    return std::unique_ptr<juce::AudioFormatReader>(formats.createReaderFor(file));
}

juce::AudioBuffer<float> soundOf(const juce::File& file) {
    auto open = reader(file);
    REQUIRE(open != nullptr);
    juce::AudioBuffer<float> sound(static_cast<int>(open->numChannels), static_cast<int>(open->lengthInSamples));
    open->read(&sound, 0, sound.getNumSamples(), 0, true, true);
    return sound;
}

} // namespace

TEST_CASE("The program says what it can do and when it is called wrongly", "[console]") {
    const Workshop shop;
    const auto wire = shop.wire();
    CHECK(shop.call("--help").exit == 0);
    CHECK(shop.call("--version").out.startsWith("hitchpin "));
    CHECK(shop.call("sound --help").out.contains("--midi"));
    CHECK(shop.call("").exit == 2);
    const auto unknown = shop.call("sing wire.json");
    CHECK(unknown.exit == 2);
    CHECK(unknown.err == "hitchpin: \"sing\" is not a command: must be schedule, sound, partials, check or keys (hitchpin --help)\n");
    const std::pair<const char*, const char*> wrong[] = {
        {"schedule", "schedule: an instrument file is needed"},
        {"schedule wire.json other.json", "schedule: one instrument file at a time: \"wire.json\" or \"other.json\""},
        {"schedule wire.json --loud", "schedule: --loud is not an option here"},
        {"schedule wire.json --csv", "schedule: --csv needs a value: --csv F"},
        {"sound wire.json --scale", "sound: --out F is needed: where the sound goes"},
        {"sound wire.json --scale --out a.mp3", "sound: --out = a.mp3: must end in .wav or .flac"},
        {"sound wire.json --out a.wav", "sound: one of --note N, --scale and --midi F says what is played"},
        {"sound wire.json --out a.wav --scale --note A2", "sound: one of --note N, --scale and --midi F says what is played"},
        {"sound wire.json --out a.wav --note H2", "sound: --note = H2: must be a note from C-1 to G9, as A3, F#2 or Bb4"},
        {"sound wire.json --out a.wav --scale --rate 12", "sound: --rate = 12 Hz: must be from 8000 to 192000 Hz"},
        {"sound wire.json --out a.wav --scale --seconds nan", "sound: --seconds = nan: must be from 0.01 to 3600 s"},
        {"sound wire.json --out a.wav --scale --bits 20", "sound: --bits = 20: must be 16, 24 or 32"},
        {"sound wire.json --out a.flac --scale --bits 32", "sound: --bits = 32: must be 16 or 24 in FLAC"},
        {"sound wire.json --out a.wav --scale --quality best", "sound: --quality = best: must be live or reference"},
        {"partials wire.json", "partials: one of --note N and --all is needed: which strings"}};
    for (const auto& [arguments, message] : wrong) {
        CAPTURE(arguments);
        const auto call = shop.call(arguments);
        CHECK(call.exit == 2);
        CHECK(call.err.upToFirstOccurrenceOf("\n", false, false) == juce::String("hitchpin: ") + message);
        CHECK(call.out.isEmpty());
    }
    CHECK(shop.files() == 1);
}

TEST_CASE("The schedule goes to stdout, and to CSV and JSON files", "[console]") {
    const Workshop shop;
    shop.wire();
    const auto call = shop.call("schedule wire.json --csv s.csv --json s.json");
    CHECK(call.exit == 0);
    CHECK(call.err.isEmpty());
    CHECK(call.out.contains("A2"));
    CHECK(shop.folder.getChildFile("s.csv").loadFileAsString().startsWith("note,"));
    CHECK(juce::JSON::parse(shop.folder.getChildFile("s.json").loadFileAsString())["courses"].size() == 2);
    CHECK(shop.files() == 3);
}

TEST_CASE("Check lists keys, marks and defaults", "[console]") {
    const Workshop shop;
    shop.wire();
    const auto call = shop.call("check wire.json");
    CHECK(call.exit == 0);
    CHECK(call.out.startsWith("Wire: 2 courses, 2 strings; the file is well formed.\n"));
    CHECK(call.out.contains("keys that sound an open course: A2, E3\n"));
    CHECK(call.out.contains("keys that sound a stopped one: F3-A3\n"));
    CHECK(call.out.contains("tuning.a4_hz = 440\n"));
    CHECK(shop.call("keys").out.contains("speaking_length_mm: a number over 0 and at most 10000 mm; required"));
}

TEST_CASE("Bad files end with 1 and a line a problem", "[console]") {
    const Workshop shop;
    shop.write("bad.json", R"({"format": "hitchpin-instrument", "version": 1, "courses": [
        {"note": "H2", "speaking_length_mm": -300, "core": {"material": "music wire", "diameter_mm": 0.6}}]})");
    for (const char* command : {"schedule bad.json", "check bad.json", "partials bad.json --note A2", "sound bad.json --note A2 --out a.wav"}) {
        CAPTURE(command);
        const auto call = shop.call(command);
        CHECK(call.exit == 1);
        CHECK(call.out.isEmpty());
        CHECK(call.err == "hitchpin: bad.json: courses[0].speaking_length_mm = -300 mm: must be over 0 and at most 10000 mm\n"
                          "hitchpin: bad.json: courses[0].note = \"H2\": must be a note from C-1 to G9, such as \"C4\", \"F#2\" or \"Bb3\"\n");
    }
    CHECK(shop.call("check missing.json").err == "hitchpin: missing.json: there is no such file\n");
    CHECK(shop.call("check .").err == "hitchpin: .: this is a directory, not an instrument file\n");
    CHECK(shop.files() == 1);
}

// Root may read everything: tried as somebody without its rights.
TEST_CASE("A file without permission is said to be so", "[console]") {
    const Workshop shop;
    const auto wire = shop.wire();
    chmod(wire.getFullPathName().toRawUTF8(), 0);
    const bool root = geteuid() == 0;
    // The program itself may lie where only root can go.
    const auto program = shop.folder.getChildFile("program");
    REQUIRE(juce::File(HITCHPIN_CONSOLE).copyFileTo(program));
    chmod(program.getFullPathName().toRawUTF8(), 0755);
    const auto line = "cd " + shop.folder.getFullPathName() + " && " +
                      (root ? "setpriv --reuid=65534 --regid=65534 --clear-groups " : "") + "./program check wire.json 2>&1";
    juce::String said;
    if (FILE* pipe = popen(line.toRawUTF8(), "r")) {
        char text[512];
        while (std::fgets(text, sizeof text, pipe) != nullptr)
            said << text;
        CHECK(WEXITSTATUS(pclose(pipe)) == 1);
    }
    CHECK(said == "hitchpin: wire.json: the file cannot be opened: Permission denied\n");
    chmod(wire.getFullPathName().toRawUTF8(), 0644);
}

TEST_CASE("Sound is written in every format at its physical level", "[console]") {
    const Workshop shop;
    shop.wire();
    struct Format {
        const char* name;
        const char* options;
        unsigned bits;
        bool floating;
        double rate;
    };
    const Format formats[] = {{"a.wav", "", 32, true, 48000},
                              {"b.wav", "--bits 24 --rate 44100", 24, false, 44100},
                              {"c.wav", "--bits 16 --rate 96000", 16, false, 96000},
                              {"d.flac", "", 24, false, 48000},
                              {"e.flac", "--bits 16", 16, false, 48000}};
    juce::AudioBuffer<float> reference;
    for (const auto& format : formats) {
        CAPTURE(format.name);
        const auto call = shop.call(juce::String("sound wire.json --note A2 --seconds 0.5 --out ") + format.name + " " + format.options);
        CHECK(call.exit == 0);
        CHECK(call.err.contains("full scale is 20 N of force at the bridge"));
        const auto open = reader(shop.folder.getChildFile(format.name));
        REQUIRE(open != nullptr);
        CHECK(open->sampleRate == format.rate);
        CHECK(open->bitsPerSample == format.bits);
        CHECK(open->usesFloatingPointData == format.floating);
        CHECK(open->numChannels == 2);
        CHECK(open->lengthInSamples == static_cast<juce::int64>(0.5 * format.rate));
        const auto sound = soundOf(shop.folder.getChildFile(format.name));
        CHECK(sound.getMagnitude(0, sound.getNumSamples()) > 0.01f);
        if (format.rate == 48000.0) {
            if (reference.getNumSamples() == 0)
                reference = sound;
            float apart = 0.0f;
            for (int i = 0; i < sound.getNumSamples(); ++i)
                apart = std::max(apart, std::abs(sound.getSample(0, i) - reference.getSample(0, i)));
            CHECK(apart <= std::ldexp(1.0f, 1 - static_cast<int>(format.bits)) + 1e-7f); // a step of the format
        }
    }
}

TEST_CASE("Whole-number formats say what they cut off", "[console]") {
    const Workshop shop;
    shop.write("loud.json", shop.wire().loadFileAsString().replace("\"courses\"", "\"playing\": {\"force_n\": 100, \"angle_deg\": 90}, \"courses\""));
    CHECK(shop.call("sound loud.json --note A2 --seconds 0.2 --bits 16 --out a.wav").err.contains("samples over full scale are cut off: --bits 32 keeps them"));
    CHECK(shop.call("sound loud.json --note A2 --seconds 0.2 --out b.wav").err.contains("the peak is over full scale"));
    const auto kept = soundOf(shop.folder.getChildFile("b.wav"));
    CHECK(kept.getMagnitude(0, kept.getNumSamples()) > 1.5f);
}

TEST_CASE("A scale plays each course, a MIDI file its notes at their times", "[console]") {
    const Workshop shop;
    shop.wire();
    CHECK(shop.call("sound wire.json --scale --out scale.wav --quality live").exit == 0);
    juce::MidiMessageSequence track;
    track.addEvent(juce::MidiMessage::tempoMetaEvent(500000), 0);
    track.addEvent(juce::MidiMessage::noteOn(1, 45, juce::uint8{90}), 960); // one second in
    track.addEvent(juce::MidiMessage::noteOff(1, 45), 1440);
    track.addEvent(juce::MidiMessage::noteOn(1, 54, juce::uint8{90}), 1920); // E3 at the second fret, two seconds in
    juce::MidiFile midi;
    midi.setTicksPerQuarterNote(480);
    midi.addTrack(track);
    {
        juce::FileOutputStream stream(shop.folder.getChildFile("two.mid"));
        midi.writeTo(stream);
    }
    CHECK(shop.call("sound wire.json --midi two.mid --out two.wav --quality live").exit == 0);
    const auto sound = soundOf(shop.folder.getChildFile("two.wav"));
    CHECK(sound.getMagnitude(0, 47990) == 0.0f);
    CHECK(sound.getMagnitude(48000, 9600) > 0.01f);
    CHECK(sound.getMagnitude(96000, 9600) > sound.getMagnitude(90000, 4800));
    shop.write("no.mid", "no MIDI here");
    CHECK(shop.call("sound wire.json --midi no.mid --out no.wav").err == "hitchpin: no.mid: is not a Standard MIDI File\n");
    CHECK(shop.call("sound wire.json --midi missing.mid --out no.wav").exit == 1);
    CHECK_FALSE(shop.folder.getChildFile("no.wav").exists());
}

TEST_CASE("A key without a string is said so", "[console]") {
    const Workshop shop;
    shop.wire();
    for (const char* command : {"sound wire.json --note C6 --out a.wav", "partials wire.json --note C6"}) {
        const auto call = shop.call(command);
        CHECK(call.exit == 1);
        CHECK(call.err == "hitchpin: --note = C6: no course of this instrument sounds it (hitchpin check lists the keys)\n");
    }
    CHECK(shop.files() == 1);
}

TEST_CASE("An impossible string is marked and still sounds", "[console]") {
    const Workshop shop;
    shop.write("over.json", R"({"format": "hitchpin-instrument", "version": 1, "courses": [
        {"note": "A4", "speaking_length_mm": 900, "core": {"material": "music wire", "diameter_mm": 0.6}}]})");
    CHECK(shop.call("check over.json").out.contains("would break"));
    CHECK(shop.call("sound over.json --note A4 --seconds 0.5 --out a.wav").exit == 0);
    const auto sound = soundOf(shop.folder.getChildFile("a.wav"));
    CHECK(sound.getMagnitude(0, sound.getNumSamples()) > 0.01f);
}

TEST_CASE("Partials puts predicted beside measured", "[console]") {
    const Workshop shop;
    shop.wire();
    const auto call = shop.call("partials wire.json --note F#3");
    CHECK(call.exit == 0);
    CHECK(call.out.startsWith("E3 stopped at fret 2, one string alone between its ends, reference quality"));
    const auto first = juce::StringArray::fromTokens(
        call.out.fromFirstOccurrenceOf("measured\n", false, false).upToFirstOccurrenceOf("\n", false, false), " ", "");
    juce::StringArray cells = first;
    cells.removeEmptyStrings();
    REQUIRE(cells.size() == 7);
    CHECK(cells[0] == "1");
    CHECK(std::abs(cells[3].getDoubleValue()) <= 0.05); // cents
}

// Turned red by: writing straight into the file that was asked for.
TEST_CASE("A full disk leaves the old file as it was and nothing beside it", "[console]") {
    const Workshop shop;
    shop.wire();
    shop.write("a.wav", "the old one");
    shop.write("s.json", "the old one");
    // No file of this call may grow over 8 kB: as a disk that fills up while it is written.
    for (const char* command : {"sound wire.json --note A2 --seconds 1 --out a.wav --quality live", "schedule wire.json --json s.json"}) {
        const auto call = shop.call(command, juce::String(command).startsWith("sound") ? "trap '' XFSZ; ulimit -f 8;" : "trap '' XFSZ; ulimit -f 1;");
        CAPTURE(command);
        CHECK(call.exit == 1);
        CHECK(call.err.contains("cannot write"));
    }
    CHECK(shop.folder.getChildFile("a.wav").loadFileAsString() == "the old one");
    CHECK(shop.folder.getChildFile("s.json").loadFileAsString() == "the old one");
    CHECK(shop.files() == 3);
    CHECK(shop.call("sound wire.json --note A2 --out no/such/a.wav --quality live").exit == 1);
}

TEST_CASE("An interrupt leaves no file", "[console]") {
    const Workshop shop;
    shop.wire();
    const pid_t child = fork();
    if (child == 0) {
        if (chdir(shop.folder.getFullPathName().toRawUTF8()) == 0 && freopen("/dev/null", "w", stderr) != nullptr)
            execl(HITCHPIN_CONSOLE, "hitchpin", "sound", "wire.json", "--note", "A2", "--seconds", "3600", "--out", "a.wav", static_cast<char*>(nullptr));
        _exit(99);
    }
    // When the file that is written beside the target appears, the work is under way.
    for (int i = 0; i < 1000 && shop.files() < 2; ++i)
        usleep(10000);
    CHECK(shop.files() == 2);
    kill(child, SIGINT);
    int status = 0;
    waitpid(child, &status, 0);
    REQUIRE(WIFEXITED(status));
    CHECK(WEXITSTATUS(status) == 1);
    CHECK(shop.files() == 1);
}

// The whole-instrument check: see Source/console/AllPartials.cpp for what it allows. Turned red by whatever makes the
// engine's junction, loops or modes differ from their equation.
TEST_CASE("Every coupled partial of the lap harp sounds where the bridge equation says", "[console]") {
    const Workshop shop;
    const auto checked = shop.call("partials " HITCHPIN_PRESETS "/lap-harp.json --all");
    INFO(checked.err << checked.out.getLastCharacters(600));
    CHECK(checked.exit == 0);
    CHECK(checked.out.contains(" 0 not found."));
    CHECK(checked.out.contains("board 197 Hz"));
    CHECK_FALSE(checked.out.contains("OFF"));
    CHECK(checked.err.isEmpty());
    std::cout << checked.out.fromLastOccurrenceOf("\n\n", false, false);
}
