#include "Source/editor/ScheduleTable.h"

#include "Source/editor/Paper.h"
#include "Source/report/Digits.h"

namespace hitchpin::editor {

namespace {

juce::String wordsOf(const report::ScheduleRow& row) {
    juce::StringArray words;
    for (const auto& warning : row.warnings)
        words.add(juce::String::fromUTF8(warning.c_str()));
    return words.joinIntoString("; ");
}

struct Column {
    const char* name; ///< a leading blank: words, to the left
    int width;
    juce::String (*text)(const report::ScheduleRow&);
};

juce::String fromUtf8(const std::string& text) { return juce::String::fromUTF8(text.c_str()); }

constexpr int warningsColumn = 12;

const std::array<Column, warningsColumn> columns{{
    {" Note", 42, [](const report::ScheduleRow& r) { return fromUtf8(r.note); }},
    {"Pitch Hz", 58, [](const report::ScheduleRow& r) { return juce::String(r.pitchHz, r.pitchHz < 1000 ? 2 : 1); }},
    {"Strings", 46, [](const report::ScheduleRow& r) { return juce::String(r.strings); }},
    {"Length mm", 54, [](const report::ScheduleRow& r) { return juce::String(r.speakingLengthMm, 1); }},
    {" Core", 120, [](const report::ScheduleRow& r) { return fromUtf8(r.core); }},
    {" Windings", 146, [](const report::ScheduleRow& r) { return fromUtf8(r.windings); }},
    {"Tension N", 52, [](const report::ScheduleRow& r) { return fromUtf8(report::threeDigits(r.tensionN)); }},
    {"Share of breaking", 56, [](const report::ScheduleRow& r) { return juce::String(r.breakingShare, 2); }},
    {"Semitones left", 72, [](const report::ScheduleRow& r) { return juce::String(r.semitonesToBreaking, 1); }},
    {"Ring s on board", 56, [](const report::ScheduleRow& r) { return fromUtf8(report::threeDigits(r.boardT60S.front())); }},
    {"Ring s alone", 48, [](const report::ScheduleRow& r) { return fromUtf8(report::threeDigits(r.decayT60S.front())); }},
    {" Warnings", 110, wordsOf},
}};

} // namespace

ScheduleTable::ScheduleTable() {
    table_.setModel(this);
    table_.setRowHeight(20);
    table_.setHeaderHeight(34);
    table_.setOutlineThickness(0);
    table_.setTitle("Stringing schedule");
    auto& header = table_.getHeader();
    for (std::size_t i = 0; i < columns.size(); ++i)
        header.addColumn(columns[i].name, static_cast<int>(i) + 1, columns[i].width, 30, -1,
                         juce::TableHeaderComponent::visible | juce::TableHeaderComponent::resizable);
    header.setStretchToFitActive(false);
    header.setPopupMenuActive(false);
    addAndMakeVisible(table_);
}

void ScheduleTable::show(std::shared_ptr<const plugin::InstrumentView> view) {
    view_ = std::move(view);
    table_.updateContent();
    table_.repaint();
}

void ScheduleTable::resized() {
    table_.setBounds(getLocalBounds());
    // The last column takes what is left, so that warnings are read without scrolling where there is room.
    int others = 0;
    for (int i = 0; i + 1 < warningsColumn; ++i)
        others += table_.getHeader().getColumnWidth(i + 1);
    table_.getHeader().setColumnWidth(warningsColumn, std::max(110, getWidth() - others - 14));
}

int ScheduleTable::getNumRows() { return view_ != nullptr ? static_cast<int>(view_->schedule.courses.size()) : 0; }

void ScheduleTable::paintRowBackground(juce::Graphics& g, int, int width, int height, bool selected) {
    if (selected)
        g.fillAll(paper::inset);
    g.setColour(paper::rule.withAlpha(0.6f));
    g.fillRect(0, height - 1, width, 1);
}

void ScheduleTable::paintCell(juce::Graphics& g, int row, int column, int width, int height, bool) {
    if (view_ == nullptr || row < 0 || row >= getNumRows() || column < 1 || column > warningsColumn)
        return;
    const report::ScheduleRow& course = view_->schedule.courses[static_cast<std::size_t>(row)];
    const Column& shown = columns[static_cast<std::size_t>(column - 1)];
    const bool words = shown.name[0] == ' ';
    const bool overWorking = course.workingShare > 0.0 && course.breakingShare > course.workingShare;
    g.setColour(column == warningsColumn || (column == 8 && overWorking) ? paper::accent : paper::ink);
    g.setFont(words ? textFont(13.0f) : figureFont(13.0f));
    g.drawText(shown.text(course), 6, 0, width - 12, height - 1,
               words ? juce::Justification::centredLeft : juce::Justification::centredRight, true);
}

juce::String ScheduleTable::getCellTooltip(int row, int column) {
    if (view_ == nullptr || row < 0 || row >= getNumRows())
        return {};
    const report::ScheduleRow& course = view_->schedule.courses[static_cast<std::size_t>(row)];
    if (column == warningsColumn)
        return wordsOf(course);
    if (column == 5 || column == 6)
        return columns[static_cast<std::size_t>(column - 1)].text(course);
    return {};
}

} // namespace hitchpin::editor
