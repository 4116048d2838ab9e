// Keys to play with the mouse or the computer's keyboard; they show what each would take.
#pragma once

#include "Source/plugin/Processor.h"

#include <juce_audio_utils/juce_audio_utils.h>

namespace hitchpin::editor {

/// Passes keys pressed here to the processor's queue.
class PressedKeys : private juce::MidiKeyboardState::Listener {
public:
    explicit PressedKeys(plugin::Processor&);
    ~PressedKeys() override;
    /// Lives on the message thread alone: the audio thread never sees it, nor its lock.
    juce::MidiKeyboardState pressed;

private:
    void handleNoteOn(juce::MidiKeyboardState*, int channel, int key, float velocity) override;
    void handleNoteOff(juce::MidiKeyboardState*, int channel, int key, float velocity) override;
    plugin::Processor& target_;
};

/// Plain key: an open string. A bar across it: stopped at a fret. Grey: no string within reach, silent.
class Keyboard final : private PressedKeys, public juce::MidiKeyboardComponent {
public:
    explicit Keyboard(plugin::Processor&);
    void show(std::shared_ptr<const plugin::InstrumentView>);
    /// Repaints keys that are held or were let go since the last call.
    void followPlaying();
    void resized() override;

private:
    void drawWhiteNote(int key, juce::Graphics&, juce::Rectangle<float>, bool down, bool over, juce::Colour line,
                       juce::Colour text) override;
    void drawBlackNote(int key, juce::Graphics&, juce::Rectangle<float>, bool down, bool over, juce::Colour fill) override;
    void fitRange();
    playing::KeyState stateOf(int key) const noexcept;

    plugin::Processor& processor_;
    std::shared_ptr<const plugin::InstrumentView> view_;
    std::array<bool, 128> drawnHeld_{};
};

} // namespace hitchpin::editor
