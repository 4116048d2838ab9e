#include "tests/Source/plugin/Rendering.h"

#include <catch2/catch.hpp>

#include <fstream>
#include <iostream>
#include <sstream>

using namespace hitchpin;
using namespace hitchpin::testing;
using Catch::Matchers::WithinAbs;

TEST_CASE("parameter ids, versions and ranges are those that were promised") {
    std::ifstream file(HITCHPIN_SOURCE_DIR "/tests/Source/plugin/parameters.txt");
    REQUIRE(file);
    plugin::Processor processor;
    std::size_t row = 0;
    for (std::string line; std::getline(file, line);) {
        if (line.empty() || line[0] == '#')
            continue;
        REQUIRE(row < plugin::parameterTable().size());
        const plugin::ParameterRow& shipped = plugin::parameterTable()[row];
        std::istringstream words(line);
        std::string id, unit;
        int version = 0, decimals = 0;
        double least = 0, most = 0, neutral = 0;
        words >> id >> version >> least >> most >> neutral >> decimals >> unit;
        CAPTURE(line);
        REQUIRE(words);
        CHECK(shipped.id == id);
        CHECK(shipped.version == version);
        CHECK(shipped.least == least);
        CHECK(shipped.most == most);
        CHECK(shipped.neutral == neutral);
        CHECK(shipped.decimals == decimals);
        CHECK(shipped.unit == unit);
        // And what a host sees is the table.
        auto* hosted = dynamic_cast<juce::AudioParameterFloat*>(processor.getParameters()[static_cast<int>(row)]);
        REQUIRE(hosted != nullptr);
        CHECK(hosted->paramID == juce::String(id));
        CHECK(hosted->getVersionHint() == version);
        CHECK(hosted->getNormalisableRange().start == static_cast<float>(least));
        CHECK(hosted->getNormalisableRange().end == static_cast<float>(most));
        CHECK(hosted->get() == static_cast<float>(neutral));
        ++row;
    }
    CHECK(row == plugin::parameterTable().size());
    CHECK(processor.getParameters().size() == static_cast<int>(row));
}

TEST_CASE("a parameter is written with its unit and read back to the same number") {
    plugin::Processor processor;
    int tried = 0;
    for (std::size_t i = 0; i < plugin::parameterTable().size(); ++i) {
        const plugin::ParameterRow& row = plugin::parameterTable()[i];
        juce::AudioProcessorParameter& hosted = processor.parameters()[i];
        for (int k = 0; k <= 97; ++k, ++tried) {
            hosted.setValueNotifyingHost(static_cast<float>(k) / 97.0f);
            const float value = processor.parameters()[i].get();
            const juce::String text = hosted.getCurrentValueAsText();
            CAPTURE(row.id, text, value);
            CHECK(text.contains(juce::String::fromUTF8(row.unit)));
            hosted.setValueNotifyingHost(hosted.getValueForText(text));
            CHECK(processor.parameters()[i].get() == value); // to the last bit
        }
    }
    std::cout << "parameters: " << tried << " texts read back exactly\n";
}

TEST_CASE("parameter texts are physical and forgiving") {
    const auto row = [](const char* id) -> const plugin::ParameterRow& {
        for (const auto& r : plugin::parameterTable())
            if (juce::String(r.id) == id)
                return r;
        throw std::runtime_error(id);
    };
    CHECK(plugin::textOf(row("output_level_db"), -12.0) == "-12.0 dB");
    CHECK(plugin::textOf(row("tension_factor"), 1.05) == juce::String::fromUTF8("×1.050"));
    CHECK(plugin::textOf(row("pluck_direction_offset_deg"), -0.0) == juce::String::fromUTF8("0.0 °"));
    CHECK(plugin::textOf(row("listening_spread_percent"), 50.0) == "50 %");
    CHECK(plugin::valueOf(row("output_level_db"), "-6") == -6.0);
    CHECK(plugin::valueOf(row("output_level_db"), juce::String::fromUTF8("−6,5 dB")) == -6.5);
    CHECK(plugin::valueOf(row("tension_factor"), juce::String::fromUTF8("×1.1")) == 1.1);
    CHECK(plugin::valueOf(row("tension_factor"), "1.1") == 1.1);
    CHECK(plugin::valueOf(row("pitch_offset_cents"), "+900 cents") == 200.0); // kept within the range
    CHECK(plugin::valueOf(row("pitch_offset_cents"), "words") == 0.0);
}

TEST_CASE("parameters reach what they name in SI") {
    plugin::Processor processor;
    const auto& parameters = processor.parameters();
    CHECK(parameters.adjustments() == document::Adjustments{}); // neutral, exactly
    CHECK(parameters.hand().forceFactor == 1.0);
    parameter(processor, "pluck_point_offset_percent") = 10.0f;
    parameter(processor, "pluck_force_db") = 6.0f;
    parameter(processor, "pluck_direction_offset_deg") = 45.0f;
    parameter(processor, "listening_direction_deg") = 30.0f;
    parameter(processor, "temperature_offset_k") = -5.0f;
    parameter(processor, "output_level_db") = -20.0f;
    constexpr double rounding = 1e-12;
    CHECK_THAT(parameters.hand().pluckPointOffset, WithinAbs(0.1, rounding));
    CHECK_THAT(parameters.hand().forceFactor, WithinAbs(1.9952623149688795, rounding)); // 10^(6/20)
    CHECK_THAT(parameters.hand().angleOffset, WithinAbs(0.7853981633974483, rounding)); // π/4
    CHECK_THAT(parameters.listening().angle, WithinAbs(0.5235987755982988, rounding)); // π/6
    CHECK(parameters.adjustments().temperatureOffsetK == -5.0);
    CHECK_THAT(parameters.adjustments().pluckPointOffset, WithinAbs(0.1, rounding)); // at once and, soon, exactly
    CHECK_THAT(parameters.outputGain(), WithinAbs(0.1, rounding));
}
