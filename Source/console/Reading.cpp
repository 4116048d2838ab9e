#include "Source/console/Reading.h"

#include "Source/console/Command.h"

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

void sayNotHeardYet(const document::Described& described) {
    for (const auto& sentence : described.notHeardYet)
        say("not heard yet: " + sentence);
}

} // namespace hitchpin::console
