// Note names and numbers. Note 69 is A4, 60 is C4 (scientific pitch notation), as in MIDI.
#pragma once

#include <optional>
#include <string>
#include <string_view>

namespace hitchpin::tuning {

/// "C4", "F#2", "Bb3", "C-1"; sharps '#', flats 'b'. nullopt where it is not a note from C-1 to G9 (0…127).
std::optional<int> noteNumber(std::string_view name);
/// "C", "F#", "Bb": 0…11.
std::optional<int> pitchClass(std::string_view name);
/// Spelt with sharps: 61 → "C#4".
std::string noteName(int number);

} // namespace hitchpin::tuning
