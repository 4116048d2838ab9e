#include "dsp/tuning/Notes.h"

#include <array>
#include <charconv>

namespace hitchpin::tuning {
namespace {

struct Spelled {
    int pitchClass; ///< may lie outside 0…11: "Cb" is −1
    std::string_view rest;
};

std::optional<Spelled> letterAndAccidental(std::string_view name) {
    static constexpr std::array<int, 7> white{9, 11, 0, 2, 4, 5, 7}; // A…G
    if (name.empty() || name.front() < 'A' || name.front() > 'G')
        return std::nullopt;
    int pitchClass = white[static_cast<std::size_t>(name.front() - 'A')];
    name.remove_prefix(1);
    if (!name.empty() && (name.front() == '#' || name.front() == 'b')) {
        pitchClass += name.front() == '#' ? 1 : -1;
        name.remove_prefix(1);
    }
    return Spelled{pitchClass, name};
}

} // namespace

std::optional<int> noteNumber(std::string_view name) {
    const auto spelled = letterAndAccidental(name);
    if (!spelled || spelled->rest.empty() || spelled->rest.size() > 2)
        return std::nullopt;
    int octave = 0;
    const auto [end, failure] =
        std::from_chars(spelled->rest.data(), spelled->rest.data() + spelled->rest.size(), octave);
    if (failure != std::errc{} || end != spelled->rest.data() + spelled->rest.size())
        return std::nullopt;
    const int number = 12 * (octave + 1) + spelled->pitchClass;
    return number >= 0 && number <= 127 ? std::optional(number) : std::nullopt;
}

std::optional<int> pitchClass(std::string_view name) {
    const auto spelled = letterAndAccidental(name);
    if (!spelled || !spelled->rest.empty())
        return std::nullopt;
    return (spelled->pitchClass + 12) % 12;
}

std::string noteName(int number) {
    static constexpr std::array<const char*, 12> names{"C",  "C#", "D",  "D#", "E",  "F",
                                                       "F#", "G",  "G#", "A",  "A#", "B"};
    const int octave = (number >= 0 ? number / 12 : (number - 11) / 12) - 1;
    return names[static_cast<std::size_t>(((number % 12) + 12) % 12)] + std::to_string(octave);
}

} // namespace hitchpin::tuning
