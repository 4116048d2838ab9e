// The window: title block, schedule, parameters, what is to be said, keys.
#pragma once

#include "Source/editor/HandPanel.h"
#include "Source/editor/Keyboard.h"
#include "Source/editor/Paper.h"
#include "Source/editor/ScheduleTable.h"
#include "Source/plugin/Processor.h"

#include <juce_audio_processors/juce_audio_processors.h>

namespace hitchpin::editor {

/// Reads the processor's view and meters some twenty times a second; nothing on the audio thread knows of it.
class Editor final : public juce::AudioProcessorEditor, private juce::Timer {
public:
    explicit Editor(plugin::Processor&);
    ~Editor() override;
    void paint(juce::Graphics&) override;
    void resized() override;
    void parentHierarchyChanged() override;

private:
    void timerCallback() override;
    void refresh();          ///< title, schedule, notes: after a new view or message
    void refreshStatus();
    void choosePreset();
    void chooseFileToLoad();
    void chooseFileToSave();

    plugin::Processor& processor_;
    Paper paper_;
    juce::Label name_, summary_, status_, notesHeading_, keysLegend_;
    juce::ComboBox presets_;
    juce::TextButton load_{"Load"}, save_{"Save"}, silence_{"Silence"};
    ScheduleTable schedule_;
    juce::TextEditor notes_;
    HandPanel hand_;
    juce::Viewport handView_;
    Keyboard keys_;
    juce::TooltipWindow tooltips_{this, 600};
    std::unique_ptr<juce::FileChooser> chooser_;

    unsigned viewShown_ = 0, messageShown_ = 0, putOutSeen_ = 0;
    float limiterGain_ = 1.0f;
    juce::uint32 limiterUntil_ = 0, overloadUntil_ = 0;
};

} // namespace hitchpin::editor
