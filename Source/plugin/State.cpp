#include "Source/plugin/State.h"

#include <cmath>

namespace hitchpin::plugin {

namespace {
const juce::Identifier versionKey("hitchpin_state"), instrumentKey("instrument"), parametersKey("parameters");
}

std::span<const MigrationStep> migrationSteps() { return {}; }

juce::String stateText(const document::Instrument& instrument, const Parameters& parameters) {
    auto* values = new juce::DynamicObject;
    for (std::size_t i = 0; i < parameters.size(); ++i)
        values->setProperty(parameterTable()[i].id, parameters.value(i));
    auto* state = new juce::DynamicObject;
    const juce::var owner(state);
    state->setProperty(versionKey, stateVersion);
    // As text, so that what the document layer wrote is what it reads, to the last digit.
    state->setProperty(instrumentKey, document::toJson(instrument));
    state->setProperty(parametersKey, juce::var(values));
    return juce::JSON::toString(owner);
}

Result<State, std::vector<std::string>> readState(const juce::String& text, std::span<const MigrationStep> steps) {
    using Problems = std::vector<std::string>;
    juce::var parsed;
    if (juce::JSON::parse(text, parsed).failed() || parsed.getDynamicObject() == nullptr ||
        !parsed.hasProperty(versionKey))
        return Problems{"The saved state is not one of Hitchpin's."};
    juce::DynamicObject& state = *parsed.getDynamicObject();

    const juce::var version = state.getProperty(versionKey);
    const int latest = static_cast<int>(steps.size()) + 1;
    if (!version.isInt() || static_cast<int>(version) < 1)
        return Problems{"hitchpin_state = " + version.toString().toStdString() + ": must be a whole number from 1"};
    if (static_cast<int>(version) > latest)
        return Problems{"The saved state has version " + version.toString().toStdString() +
                        "; this Hitchpin reads up to " + std::to_string(latest) + "."};
    for (int from = version; from < latest; ++from)
        steps[static_cast<std::size_t>(from - 1)](state);

    Problems problems;
    auto instrument = document::parse(state.getProperty(instrumentKey).toString());
    if (!instrument)
        for (const document::Problem& problem : instrument.error())
            problems.push_back("instrument: " + problem.message);

    State result;
    const juce::var values = state.getProperty(parametersKey);
    for (const ParameterRow& row : parameterTable()) {
        const juce::var value = values.getProperty(row.id, row.neutral);
        const bool isNumber = value.isDouble() || value.isInt() || value.isInt64();
        const double number = value;
        if (!isNumber || !std::isfinite(number) || number < row.least || number > row.most) {
            problems.push_back("parameters." + std::string(row.id) + " = " + value.toString().toStdString() +
                               ": must be from " + textOf(row, row.least).toStdString() + " to " +
                               textOf(row, row.most).toStdString());
            continue;
        }
        result.parameters.push_back(number);
    }
    if (!problems.empty())
        return problems;
    result.instrument = std::move(instrument).value();
    return result;
}

} // namespace hitchpin::plugin
