// The invented instruments that travel inside the program.
#pragma once

#include "Source/document/Document.h"

#include <juce_core/juce_core.h>

#include <vector>

namespace hitchpin::plugin {

struct Preset {
    juce::String name; ///< of the instrument
    juce::String file; ///< "lap-harp.json"
    juce::String json;
};

/// In the order of their file names.
const std::vector<Preset>& presets();

/// With which the app and a new plug-in begin: the lap harp, or the first there is.
const Preset& firstPreset();

} // namespace hitchpin::plugin
