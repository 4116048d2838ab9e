// What a host keeps of an instance: the whole instrument and every parameter, as JSON text.
#pragma once

#include "Source/document/Document.h"
#include "Source/plugin/Parameters.h"

#include <juce_core/juce_core.h>

#include <span>
#include <vector>

namespace hitchpin::plugin {

/// {"hitchpin_state": 1, "instrument": {…the instrument file…}, "parameters": {"tension_factor": 1.0, …}}
inline constexpr int stateVersion = 1;

struct State {
    document::Instrument instrument;
    std::vector<double> parameters; ///< in the table's order
};

juce::String stateText(const document::Instrument&, const Parameters&);

/// Brings the whole state from one version to the next, in place. step[0] leads from version 1 to 2.
using MigrationStep = void (*)(juce::DynamicObject& state);
/// Those of this program: none yet, version 1 is the first.
std::span<const MigrationStep> migrationSteps();

/// Refuses, with a sentence for each problem, what is not a state, comes from a later version, or holds an
/// instrument or a value that cannot be. Parameters that are missing are neutral; parameters that this version
/// does not know are left out.
Result<State, std::vector<std::string>> readState(const juce::String& text,
                                                  std::span<const MigrationStep> steps = migrationSteps());

} // namespace hitchpin::plugin
