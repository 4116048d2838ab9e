#include "Source/console/Reading.h"

#include "dsp/tuning/Notes.h"

namespace hitchpin::console {

juce::File fileNamed(const std::string& path) {
    return juce::File::getCurrentWorkingDirectory().getChildFile(
        juce::String::fromUTF8(path.data(), static_cast<int>(path.size())));
}

std::optional<Read> readInstrument(const std::string& path, int partialCount) {
    const auto sayAll = [&](const document::Problems& problems) {
        for (const auto& problem : problems)
            say(path + ": " + problem.message);
    };
    auto instrument = document::load(fileNamed(path));
    if (!instrument) {
        sayAll(instrument.error());
        return std::nullopt;
    }
    auto described = document::describe(*instrument, {}, partialCount);
    if (!described) {
        sayAll(described.error());
        return std::nullopt;
    }
    return Read{std::move(instrument).value(), std::move(described).value()};
}

Result<design::Quality> qualityFrom(const Arguments& arguments) {
    const auto quality = arguments.text("--quality").value_or("reference");
    if (quality == "live")
        return design::Quality::live;
    if (quality == "reference")
        return design::Quality::reference;
    return Failure{"--quality = " + quality + ": must be live or reference"};
}

Result<int> keyFrom(const Arguments& arguments) {
    const auto note = arguments.text("--note").value_or("");
    if (const auto key = tuning::noteNumber(note))
        return *key;
    return Failure{"--note = " + note + ": must be a note from C-1 to G9, as A3, F#2 or Bb4"};
}

void sayOutOfReach(const Arguments& arguments) {
    say("--note = " + arguments.text("--note").value_or("") +
        ": no course of this instrument sounds it (hitchpin check lists the keys)");
}

void sayNotHeardYet(const document::Described& described) {
    for (const auto& sentence : described.notHeardYet)
        say("not heard yet: " + sentence);
}

} // namespace hitchpin::console
