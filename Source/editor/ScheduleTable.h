// The stringing schedule as a table.
#pragma once

#include "Source/plugin/Workbench.h"

#include <juce_gui_basics/juce_gui_basics.h>

namespace hitchpin::editor {

class ScheduleTable final : public juce::Component, private juce::TableListBoxModel {
public:
    ScheduleTable();
    void show(std::shared_ptr<const plugin::InstrumentView>);
    void resized() override;

private:
    int getNumRows() override;
    void paintRowBackground(juce::Graphics&, int row, int width, int height, bool selected) override;
    void paintCell(juce::Graphics&, int row, int column, int width, int height, bool selected) override;
    juce::String getCellTooltip(int row, int column) override;

    std::shared_ptr<const plugin::InstrumentView> view_;
    juce::TableListBox table_;
};

} // namespace hitchpin::editor
