// When the machine cannot keep up.
#include "tests/Source/plugin/Rendering.h"

#include "dsp/tuning/Notes.h"

#include <catch2/catch.hpp>

#include <cmath>
#include <iostream>

namespace juce {
bool dispatchNextMessageOnSystemQueue(bool returnIfNoPendingMessages); // in juce_events, Linux
}

using namespace hitchpin;
using namespace hitchpin::testing;

namespace {

constexpr int lowestKey = 36;

/// More strings than any machine runs at once by plain loops: a course of eight for each key from C2.
juce::String crowd(int courses) {
    juce::String json = R"({"format":"hitchpin-instrument","version":1,"name":"Crowd","courses":[)";
    for (int i = 0; i < courses; ++i)
        json << (i > 0 ? "," : "") << R"({"note":")" << juce::String(tuning::noteName(lowestKey + i))
             << R"(","strings":8,"speaking_length_mm":)" << 1200.0 * std::pow(2.0, -i / 16.0)
             << R"(,"core":{"material":"music wire","diameter_mm":0.5}})";
    return json + "]}";
}

/// Lets timers and messages of the window happen.
void handleMessages(juce::uint32 milliseconds) {
    const auto until = juce::Time::getMillisecondCounter() + milliseconds;
    while (juce::Time::getMillisecondCounter() < until)
        if (!juce::dispatchNextMessageOnSystemQueue(true))
            juce::Thread::sleep(2);
}

juce::String wordsIn(const juce::Component& component) {
    juce::String words;
    if (const auto* label = dynamic_cast<const juce::Label*>(&component))
        words << label->getText() << "\n";
    if (const auto* text = dynamic_cast<const juce::TextEditor*>(&component))
        words << text->getText() << "\n";
    for (const auto* child : component.getChildren())
        words << wordsIn(*child);
    return words;
}

} // namespace

TEST_CASE("a machine that cannot keep up puts the quietest strings out without a click and says so") {
    constexpr int courses = 60;
    plugin::Processor processor;
    REQUIRE(processor.loadInstrument(crowd(courses), "crowd"));
    constexpr double rate = 192000.0;
    processor.setRateAndBufferSizeDetails(rate, 256);
    processor.prepareToPlay(rate, 256); // live
    REQUIRE(processor.bench().waitForDesign());
    const std::unique_ptr<juce::AudioProcessorEditor> editor(processor.createEditor());
    parameter(processor, "output_level_db") = 24.0f; // and loud, for the limiter
    juce::AudioBuffer<float> buffer(2, 256);
    juce::MidiBuffer midi;
    int most = 0;
    std::vector<float> sound;
    for (int block = 0; block < 600; ++block) {
        midi.clear();
        if (block < courses)
            midi.addEvent(juce::MidiMessage::noteOn(1, lowestKey + block, static_cast<juce::uint8>(30 + block)), 0);
        processor.processBlock(buffer, midi);
        most = std::max(most, processor.meters().ringingStrings.load());
        for (int i = 0; i < 256; ++i)
            sound.push_back(buffer.getSample(0, i));
    }
    const int left = processor.meters().ringingStrings.load();
    const unsigned putOut = processor.meters().stringsPutOut.load();
    std::cout << "overload: " << most << " strings at most, " << putOut << " put out, " << left << " ringing in the end, load "
              << processor.load() << "\n";
    REQUIRE(most > 100);
    CHECK(putOut > 0);
    CHECK(left < most);
    CHECK(left > 0); // the last string is never put out
    CHECK(peak(sound) == Approx(plugin::Limiter::threshold));
    handleMessages(300);
    const auto words = wordsIn(*editor);
    INFO(words);
    CHECK(words.contains("This is more than the machine can run: the quietest strings are put out"));
}

TEST_CASE("the window says when the limiter acts and is quiet about it when it does not") {
    plugin::Processor processor;
    REQUIRE(processor.loadInstrument(smallInstrument, "test"));
    makeReady(processor);
    const std::unique_ptr<juce::AudioProcessorEditor> editor(processor.createEditor());
    play(processor, {{0, 45}}, 4800);
    handleMessages(200);
    CHECK_FALSE(wordsIn(*editor).contains("Limiter"));
    CHECK(wordsIn(*editor).contains("1 string ringing"));
    parameter(processor, "output_level_db") = 24.0f;
    parameter(processor, "pluck_force_db") = 24.0f;
    play(processor, {{0, 45}}, 4800);
    handleMessages(200);
    CHECK(wordsIn(*editor).contains("Limiter: held back by"));
}

TEST_CASE("offline nothing is ever put out") {
    plugin::Processor processor;
    REQUIRE(processor.loadInstrument(crowd(30), "crowd"));
    makeReady(processor, 192000.0);
    std::vector<Note> notes;
    for (int i = 0; i < 30; ++i)
        notes.push_back({i * 100, lowestKey + i});
    play(processor, notes, 19200, 64);
    CHECK(processor.meters().stringsPutOut == 0);
}
