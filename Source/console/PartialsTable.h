// What both tables of partials share: of one string alone, and of the whole instrument.
#pragma once

#include <juce_core/juce_core.h>

namespace hitchpin::console {

inline constexpr double sampleRate = 48000.0;
/// A place that is no simple fraction, so that no partial within a table has a node there.
inline constexpr double pluckedAt = 0.0517;

inline juce::String column(double value, int decimals, int width) {
    return juce::String(value, decimals).paddedLeft(' ', width);
}

} // namespace hitchpin::console
