#include "Source/plugin/State.h"

#include "Source/plugin/Presets.h"
#include "tests/Source/plugin/Rendering.h"

#include <catch2/catch.hpp>

#include <random>

using namespace hitchpin;
using namespace hitchpin::testing;

namespace {
juce::String stateOf(plugin::Processor& processor) {
    juce::MemoryBlock state;
    processor.getStateInformation(state);
    return state.toString();
}
void restore(plugin::Processor& processor, const juce::String& text) {
    processor.setStateInformation(text.toRawUTF8(), static_cast<int>(text.getNumBytesAsUTF8()));
}
} // namespace

TEST_CASE("state restores instrument and parameters exactly, for every preset") {
    std::mt19937 random(7);
    std::uniform_real_distribution<float> share(0.0f, 1.0f);
    for (const auto& preset : plugin::presets()) {
        CAPTURE(preset.file);
        plugin::Processor saved, restored;
        REQUIRE(saved.loadInstrument(preset.json, preset.file));
        for (auto* parameter : saved.getParameters())
            parameter->setValueNotifyingHost(share(random));
        const auto state = stateOf(saved);
        restore(restored, state);
        CHECK(restored.messages().empty());
        CHECK(restored.bench().instrument() == saved.bench().instrument());
        for (std::size_t i = 0; i < saved.parameters().size(); ++i)
            CHECK(restored.parameters()[i].get() == saved.parameters()[i].get());
        CHECK((stateOf(restored) == state)); // not printed: it is long
    }
}

TEST_CASE("a state kept from version 1 is read for ever") {
    const auto text = juce::File(HITCHPIN_SOURCE_DIR "/tests/Source/plugin/state-version-1.json").loadFileAsString();
    REQUIRE(text.isNotEmpty());
    plugin::Processor processor;
    restore(processor, text);
    CHECK(processor.messages().empty());
    CHECK(processor.bench().instrument().name == "Kept wire");
    CHECK(parameter(processor, "tension_factor").get() == 1.125f);
    CHECK(parameter(processor, "output_level_db").get() == -18.5f);
    CHECK(parameter(processor, "length_factor").get() == 1.0f); // missing there: neutral
}

TEST_CASE("bad state is refused in words and the present instrument stays") {
    plugin::Processor processor;
    REQUIRE(processor.loadInstrument(smallInstrument, "test"));
    parameter(processor, "tension_factor") = 1.5f;
    const auto before = stateOf(processor);
    const auto refuses = [&](const juce::String& text, const std::string& because) {
        restore(processor, text);
        CHECK((stateOf(processor) == before));
        const auto messages = processor.messages();
        REQUIRE(messages.size() == 2);
        CHECK(messages[0] == "The saved state was not restored; the present instrument stays:");
        CHECK(messages[1] == because);
    };
    const auto good = plugin::stateText(processor.bench().instrument(), processor.parameters());
    refuses("not a state", "The saved state is not one of Hitchpin's.");
    refuses("[1, 2]", "The saved state is not one of Hitchpin's.");
    refuses(good.substring(0, good.length() / 2), "The saved state is not one of Hitchpin's.");
    refuses(good.replace("\"hitchpin_state\": 1", "\"hitchpin_state\": 99"),
            "The saved state has version 99; this Hitchpin reads up to 1.");
    refuses(good.replace("\"hitchpin_state\": 1", "\"hitchpin_state\": 0"),
            "hitchpin_state = 0: must be a whole number from 1");
    refuses(good.replace("\"tension_factor\": 1.5", "\"tension_factor\": 1000"),
            "parameters.tension_factor = 1000: must be from ×0.250 to ×4.000");
    refuses(good.replace("\"tension_factor\": 1.5", "\"tension_factor\": \"much\""),
            "parameters.tension_factor = much: must be from ×0.250 to ×4.000");
    restore(processor, good);
    CHECK(processor.messages().empty());

    std::mt19937 random(3); // any bytes at all
    for (int i = 0; i < 200; ++i) {
        std::vector<char> bytes(random() % 400);
        for (char& byte : bytes)
            byte = static_cast<char>(random());
        processor.setStateInformation(bytes.data(), static_cast<int>(bytes.size()));
    }
    CHECK((stateOf(processor) == before));
    processor.setStateInformation(nullptr, 0);
}

TEST_CASE("older states migrate step by step") {
    // Steps as a later version would have them; they must run in order and only from the state's own version on.
    const plugin::MigrationStep steps[] = {
        [](juce::DynamicObject& state) {
            auto* values = state.getProperty("parameters").getDynamicObject();
            values->setProperty("tension_factor", static_cast<double>(values->getProperty("pull")) / 100.0);
            values->removeProperty("pull");
        },
        [](juce::DynamicObject& state) {
            auto* values = state.getProperty("parameters").getDynamicObject();
            values->setProperty("tension_factor", static_cast<double>(values->getProperty("tension_factor")) + 0.5);
        },
    };
    const auto state = [](int version, const juce::String& parameters) {
        return "{\"hitchpin_state\": " + juce::String(version) + ", \"instrument\": " +
               juce::JSON::toString(juce::String(smallInstrument)) + ", \"parameters\": {" + parameters + "}}";
    };
    constexpr std::size_t tension = 4; // the row of tension_factor
    REQUIRE(std::string(plugin::parameterTable()[tension].id) == "tension_factor");
    const auto first = plugin::readState(state(1, "\"pull\": 125"), steps);
    REQUIRE(first);
    CHECK(first->parameters[tension] == 1.75);
    const auto second = plugin::readState(state(2, "\"tension_factor\": 1.25"), steps);
    REQUIRE(second);
    CHECK(second->parameters[tension] == 1.75);
    const auto third = plugin::readState(state(3, "\"tension_factor\": 1.25"), steps);
    REQUIRE(third);
    CHECK(third->parameters[tension] == 1.25);
    CHECK_FALSE(plugin::readState(state(4, ""), steps));
}
