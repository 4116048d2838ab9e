#include "Source/plugin/Parameters.h"

#include <algorithm>
#include <cmath>
#include <numbers>
#include <string_view>

namespace hitchpin::plugin {

namespace {

using Group = ParameterRow::Group;

/// The order of the table, so that code can name a row.
enum Row : std::size_t {
    pluckPointOffset, pluckWidthFactor, pluckDirectionOffset, pluckForce, tensionFactor, lengthFactor,
    temperatureOffset, pitchOffset, dampingFactor, listeningDirection, listeningSpread, outputLevel, rowCount
};

constexpr std::array<ParameterRow, rowCount> table{{
    {"pluck_point_offset_percent", 1, Group::pluck, "Pluck point offset", "%", -40, 40, 0, 1,
     "added to each pluck point, in percent of the speaking length from the bridge"},
    {"pluck_width_factor", 1, Group::pluck, "Pluck width factor", "×", 0.1, 10, 1, 3,
     "times the width of finger or plectrum"},
    {"pluck_direction_offset_deg", 1, Group::pluck, "Pluck direction offset", "°", -90, 90, 0, 1,
     "added to the direction of the pluck, from across the soundboard towards into it"},
    {"pluck_force_db", 1, Group::pluck, "Pluck force", "dB", -24, 24, 0, 1,
     "on the force of finger or plectrum: 6 dB is twice the force"},
    {"tension_factor", 1, Group::strings, "Tension factor", "×", 0.25, 4, 1, 3,
     "times the tension at held length: the pitch follows with its square root"},
    {"length_factor", 1, Group::strings, "Length factor", "×", 0.5, 2, 1, 3,
     "times the speaking length at held tension: the pitch follows inversely"},
    {"temperature_offset_k", 1, Group::strings, "Temperature offset", "K", -30, 30, 0, 1,
     "added to the temperature at which the strings were tuned: strings and frame expand"},
    {"pitch_offset_cents", 1, Group::strings, "Pitch offset", "cents", -200, 200, 0, 1,
     "retunes every string by its tension"},
    {"damping_factor", 1, Group::damper, "Damping factor", "×", 0.1, 10, 1, 3,
     "times the hold of the dampers: 2 damps twice as fast"},
    {"listening_direction_deg", 1, Group::listening, "Listening direction", "°", 0, 90, 90, 1,
     "which part of the bridge force is heard: 0 ° along the soundboard, 90 ° into it"},
    {"listening_spread_percent", 1, Group::listening, "Listening spread", "%", 0, 100, 50, 0,
     "0 %: both sides alike; 100 %: the ends of the bridge lie fully left and right"},
    // Starts quiet. 0 dB: digital full scale at playing::fullScaleNewtons.
    {"output_level_db", 1, Group::listening, "Output level", "dB", -60, 24, -12, 1,
     "of app and plug-in; at 0 dB full scale is 20 N of bridge force"},
}};

bool isFactor(const ParameterRow& row) { return std::string_view(row.unit) == "×"; }


juce::NormalisableRange<float> rangeOf(const ParameterRow& row) {
    return {static_cast<float>(row.least), static_cast<float>(row.most),
            [&row](float, float, float share) {
                const double x = static_cast<double>(share);
                return static_cast<float>(isFactor(row) ? row.least * std::pow(row.most / row.least, x)
                                                        : row.least + (row.most - row.least) * x);
            },
            [&row](float, float, float value) {
                const double v = static_cast<double>(value);
                const double share = isFactor(row) ? std::log(v / row.least) / std::log(row.most / row.least)
                                                   : (v - row.least) / (row.most - row.least);
                return static_cast<float>(std::clamp(share, 0.0, 1.0));
            },
            [&row](float, float, float value) { return static_cast<float>(inSteps(row, static_cast<double>(value))); }};
}

} // namespace

std::span<const ParameterRow> parameterTable() { return table; }

const char* groupName(Group group) {
    switch (group) {
    case Group::pluck: return "Pluck";
    case Group::strings: return "Strings";
    case Group::damper: return "Damper";
    case Group::listening: return "Listening";
    }
    return "";
}

double inSteps(const ParameterRow& row, double value) {
    const double stepsPerUnit = std::pow(10.0, row.decimals);
    return std::clamp(std::round(value * stepsPerUnit) / stepsPerUnit, row.least, row.most) + 0.0; // no −0
}

juce::String textOf(const ParameterRow& row, double value) {
    juce::String number(value, row.decimals);
    if (number.containsOnly("-0.")) // no "-0.0"
        number = number.removeCharacters("-");
    const auto unit = juce::String::fromUTF8(row.unit);
    return isFactor(row) ? unit + number : number + " " + unit;
}

double valueOf(const ParameterRow& row, const juce::String& text) {
    // The first number in the text; typographic minus and decimal comma are understood.
    const auto plain = text.replace(juce::String::fromUTF8("−"), "-").replaceCharacter(',', '.');
    const int start = plain.indexOfAnyOf("+-.0123456789");
    if (start < 0)
        return row.neutral;
    const double value = plain.substring(start).trimCharactersAtStart("+").getDoubleValue();
    return std::clamp(value, row.least, row.most);
}

Parameters::Parameters(juce::AudioProcessor& processor) {
    for (const ParameterRow& row : table) {
        // The unit is part of the text, so no label: hosts would write it twice.
        auto attributes =
            juce::AudioParameterFloatAttributes()
                .withStringFromValueFunction([&row](float value, int) { return textOf(row, value); })
                .withValueFromStringFunction(
                    [&row](const juce::String& text) { return static_cast<float>(valueOf(row, text)); });
        auto parameter = std::make_unique<juce::AudioParameterFloat>(
            juce::ParameterID{row.id, row.version}, row.name, rangeOf(row), static_cast<float>(row.neutral), attributes);
        parameters_.push_back(parameter.get());
        processor.addParameter(parameter.release());
    }
}

double Parameters::value(std::size_t row) const noexcept {
    return inSteps(table[row], static_cast<double>(parameters_[row]->get()));
}

document::Adjustments Parameters::adjustments() const noexcept {
    document::Adjustments adjustments;
    adjustments.tensionFactor = value(tensionFactor);
    adjustments.lengthFactor = value(lengthFactor);
    adjustments.temperatureOffsetK = value(temperatureOffset);
    adjustments.pitchOffsetCents = value(pitchOffset);
    adjustments.pluckPointOffset = value(pluckPointOffset) / 100.0;
    return adjustments;
}

playing::Hand Parameters::hand() const noexcept {
    playing::Hand hand;
    hand.pluckPointOffset = value(pluckPointOffset) / 100.0;
    hand.widthFactor = value(pluckWidthFactor);
    hand.angleOffset = value(pluckDirectionOffset) * std::numbers::pi / 180.0;
    hand.forceFactor = std::pow(10.0, value(pluckForce) / 20.0);
    hand.dampingFactor = value(dampingFactor);
    return hand;
}

engine::Listening Parameters::listening() const noexcept {
    return {value(listeningDirection) * std::numbers::pi / 180.0, value(listeningSpread) / 100.0};
}

double Parameters::outputGain() const noexcept { return std::pow(10.0, value(outputLevel) / 20.0); }

} // namespace hitchpin::plugin
