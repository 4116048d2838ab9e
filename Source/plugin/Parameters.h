// What a host can turn: neutral factors and offsets on the instrument file, in physical units.
#pragma once

#include "Source/document/Document.h"
#include "dsp/playing/Player.h"

#include <juce_audio_processors/juce_audio_processors.h>

#include <array>
#include <span>

namespace hitchpin::plugin {

/// A row is a promise: sessions of hosts are stored by id and range. Never change or reorder a row; add below,
/// with the next version hint.
struct ParameterRow {
    enum class Group { pluck, strings, damper, listening };

    const char* id;
    int version;        ///< in which it came: JUCE's version hint
    Group group;
    const char* name;
    const char* unit;   ///< as written after the number; "×" stands before it, and its scale is logarithmic
    double least;
    double most;
    double neutral;
    int decimals;       ///< of the text, and the step: value and text are the same number
    const char* meaning;
};

std::span<const ParameterRow> parameterTable();
/// "Pluck", "Strings" …
const char* groupName(ParameterRow::Group);

/// The nearest whole step within the range, in double: so neutral values, texts and stored states are exact.
double inSteps(const ParameterRow&, double value);

/// "−12.0 dB", "×1.050", "5.0 °". Plain ASCII signs and digits, whatever the locale.
juce::String textOf(const ParameterRow&, double value);
/// The same with or without the unit, with a decimal point or comma. What is no number gives the neutral value.
double valueOf(const ParameterRow&, const juce::String& text);

/// The parameters of one instance. Reading is wait-free.
class Parameters {
public:
    /// Adds them to the processor, which owns them.
    explicit Parameters(juce::AudioProcessor&);

    /// Those that need a new design.
    document::Adjustments adjustments() const noexcept;
    playing::Hand hand() const noexcept;
    engine::Listening listening() const noexcept;
    double outputGain() const noexcept;

    /// In the table's order.
    juce::AudioParameterFloat& operator[](std::size_t row) const noexcept { return *parameters_[row]; }
    std::size_t size() const noexcept { return parameters_.size(); }

    double value(std::size_t row) const noexcept;

private:
    std::vector<juce::AudioParameterFloat*> parameters_;
};

} // namespace hitchpin::plugin
