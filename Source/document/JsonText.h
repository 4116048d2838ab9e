// JSON as text: what a stranger's file must pass before it is parsed, and how values are written.
#pragma once

#include <juce_core/juce_core.h>

#include <optional>
#include <string>
#include <string_view>

namespace hitchpin::document {

inline constexpr int deepestNesting = 32;
inline constexpr std::size_t largestFileBytes = 16u << 20;

/// Strict JSON (RFC 8259) with no key twice in an object, at most `deepestNesting` brackets deep. The sentence
/// says what is wrong and where: "line 3, column 17: …" (columns count characters from 1). Never recursive.
std::optional<std::string> whatIsWrongWithJson(std::string_view text);

/// Parses text that passed `whatIsWrongWithJson`.
juce::var parseCheckedJson(std::string_view text);

/// Indented; short lists and objects on one line; numbers in the fewest digits that read back the same.
juce::String jsonText(const juce::var&);
/// The same on one line.
juce::String jsonLine(const juce::var&);
/// The fewest digits that read back the same: "0.1", "1e-05".
std::string numberText(double);

} // namespace hitchpin::document
