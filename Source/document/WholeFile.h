// Files that are there whole or not at all.
#pragma once

#include <juce_core/juce_core.h>

#include <functional>

namespace hitchpin::document {

/// Writes beside `file` and renames over it only when everything has reached the disk. `write` returns false when
/// it failed or was cancelled. On any failure the old file, if there was one, stays as it was and nothing is left
/// beside it. What is no plain file (a pipe, /dev/null) is written directly.
juce::Result writeWhole(const juce::File& file, const std::function<bool(juce::OutputStream&)>& write);

} // namespace hitchpin::document
