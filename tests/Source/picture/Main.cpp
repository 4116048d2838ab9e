// Writes a picture of the window with the first preset sounding: hitchpin_picture OUT.png [PRESET.json]
#include "Source/plugin/Presets.h"
#include "Source/plugin/Processor.h"

#include <juce_gui_basics/juce_gui_basics.h>

#include <iostream>

namespace juce {
bool dispatchNextMessageOnSystemQueue(bool returnIfNoPendingMessages); // in juce_events, Linux
}

int main(int argc, char* argv[]) {
    if (argc < 2) {
        std::cerr << "usage: hitchpin_picture OUT.png [INSTRUMENT.json]\n";
        return 2;
    }
    const juce::ScopedJuceInitialiser_GUI juceLives;
    hitchpin::plugin::Processor processor;
    const auto here = juce::File::getCurrentWorkingDirectory();
    if (argc > 2 && !processor.loadInstrument(here.getChildFile(argv[2]))) {
        for (const auto& message : processor.messages())
            std::cerr << message << "\n";
        return 1;
    }
    processor.prepareToPlay(48000.0, 512);
    processor.bench().waitForDesign();

    const std::unique_ptr<juce::AudioProcessorEditor> editor(processor.createEditor());
    editor->setVisible(true);
    juce::AudioBuffer<float> buffer(2, 512);
    juce::MidiBuffer midi;
    const auto view = processor.bench().view();
    // A chord from what the instrument has, held while the picture is taken.
    int held = 0;
    for (std::size_t course = 0; course < view->schedule.courses.size() && held < 3; ++course)
        for (int key = 40; key < 90 && held < 3; key += 1)
            if (view->keys[static_cast<std::size_t>(key)] == hitchpin::playing::KeyState::open) {
                midi.addEvent(juce::MidiMessage::noteOn(1, key, juce::uint8{80}), 0);
                key += 6;
                ++held;
            }
    for (int block = 0; block < 40; ++block) {
        processor.processBlock(buffer, midi);
        midi.clear();
    }
    const auto until = juce::Time::getMillisecondCounter() + 600;
    while (juce::Time::getMillisecondCounter() < until)
        if (!juce::dispatchNextMessageOnSystemQueue(true))
            juce::Thread::sleep(5);

    const auto out = here.getChildFile(argv[1]);
    const auto picture = editor->createComponentSnapshot(editor->getLocalBounds(), true, 1.0f);
    out.deleteFile();
    juce::FileOutputStream stream(out);
    if (!stream.openedOk() || !juce::PNGImageFormat().writeImageToStream(picture, stream)) {
        std::cerr << "cannot write " << out.getFullPathName() << "\n";
        return 1;
    }
    std::cout << out.getFullPathName() << "\n";
    return 0;
}
