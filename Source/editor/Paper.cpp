#include "Source/editor/Paper.h"

namespace hitchpin::editor {

juce::Font textFont(float height) { return juce::Font(juce::Font::getDefaultSansSerifFontName(), height, juce::Font::plain); }
juce::Font figureFont(float height) {
    return juce::Font(juce::Font::getDefaultMonospacedFontName(), height, juce::Font::plain);
}
juce::Font titleFont(float height) { return juce::Font(juce::Font::getDefaultSerifFontName(), height, juce::Font::plain); }

Paper::Paper() {
    using namespace juce;
    // In the scheme's order: window, widget, menu, outline, text, fill, highlighted text, highlighted fill, menu text.
    setColourScheme({paper::sheet, paper::inset, paper::sheet, paper::rule, paper::ink, paper::rule, paper::ink,
                     paper::rule, paper::ink});
    setColour(ResizableWindow::backgroundColourId, paper::sheet);
    setColour(DocumentWindow::textColourId, paper::ink);
    setColour(Label::textColourId, paper::ink);
    setColour(Label::textWhenEditingColourId, paper::ink);
    setColour(Label::backgroundWhenEditingColourId, paper::inset);
    setColour(Label::outlineWhenEditingColourId, paper::accent);
    setColour(TextEditor::backgroundColourId, paper::inset);
    setColour(TextEditor::textColourId, paper::ink);
    setColour(TextEditor::highlightColourId, paper::rule);
    setColour(TextEditor::highlightedTextColourId, paper::ink);
    setColour(TextEditor::outlineColourId, Colours::transparentBlack);
    setColour(TextEditor::focusedOutlineColourId, paper::accent);
    setColour(CaretComponent::caretColourId, paper::accent);
    setColour(Slider::textBoxTextColourId, paper::ink);
    setColour(Slider::textBoxBackgroundColourId, Colours::transparentBlack);
    setColour(Slider::textBoxOutlineColourId, Colours::transparentBlack);
    setColour(Slider::textBoxHighlightColourId, paper::rule);
    setColour(TextButton::textColourOffId, paper::ink);
    setColour(TextButton::textColourOnId, paper::accent);
    setColour(TextButton::buttonColourId, paper::sheet);
    setColour(ComboBox::textColourId, paper::ink);
    setColour(ComboBox::backgroundColourId, paper::sheet);
    setColour(ComboBox::outlineColourId, paper::ink);
    setColour(ComboBox::arrowColourId, paper::ink);
    setColour(PopupMenu::backgroundColourId, paper::sheet);
    setColour(PopupMenu::textColourId, paper::ink);
    setColour(PopupMenu::headerTextColourId, paper::pencil);
    setColour(PopupMenu::highlightedBackgroundColourId, paper::inset);
    setColour(PopupMenu::highlightedTextColourId, paper::accent);
    setColour(ListBox::backgroundColourId, paper::sheet);
    setColour(ListBox::textColourId, paper::ink);
    setColour(ListBox::outlineColourId, paper::rule);
    setColour(TableHeaderComponent::textColourId, paper::pencil);
    setColour(TableHeaderComponent::backgroundColourId, paper::sheet);
    setColour(TableHeaderComponent::outlineColourId, paper::ink);
    setColour(ScrollBar::thumbColourId, paper::rule);
    setColour(ToggleButton::textColourId, paper::ink);
    setColour(ToggleButton::tickColourId, paper::ink);
    setColour(TooltipWindow::backgroundColourId, paper::ink);
    setColour(TooltipWindow::textColourId, paper::sheet);
    setColour(AlertWindow::backgroundColourId, paper::sheet);
    setColour(AlertWindow::textColourId, paper::ink);
    setColour(AlertWindow::outlineColourId, paper::ink);
    setColour(DirectoryContentsDisplayComponent::textColourId, paper::ink);
    setColour(DirectoryContentsDisplayComponent::highlightColourId, paper::inset);
    setColour(DirectoryContentsDisplayComponent::highlightedTextColourId, paper::accent);
    setColour(FileBrowserComponent::currentPathBoxTextColourId, paper::ink);
    setColour(FileBrowserComponent::currentPathBoxBackgroundColourId, paper::inset);
    setColour(FileBrowserComponent::filenameBoxTextColourId, paper::ink);
    setColour(FileBrowserComponent::filenameBoxBackgroundColourId, paper::inset);
    setColour(FileChooserDialogBox::titleTextColourId, paper::ink);
}

/// A ruled line with a short mark at the neutral value and the pointer as a stroke across it.
void Paper::drawLinearSlider(juce::Graphics& g, int x, int y, int width, int height, float position, float, float,
                             juce::Slider::SliderStyle, juce::Slider& slider) {
    const float middle = static_cast<float>(y) + static_cast<float>(height) * 0.5f;
    const float left = static_cast<float>(x), right = static_cast<float>(x + width);
    g.setColour(paper::pencil);
    g.drawLine(left, middle, right, middle, 1.0f);
    const double neutralShare = slider.valueToProportionOfLength(slider.getDoubleClickReturnValue());
    const float neutral = left + (right - left) * static_cast<float>(neutralShare);
    if (slider.isDoubleClickReturnEnabled())
        g.drawLine(neutral, middle - 4.0f, neutral, middle + 4.0f, 1.0f);
    const bool moved = !juce::approximatelyEqual(slider.getValue(), slider.getDoubleClickReturnValue());
    g.setColour(moved ? paper::accent : paper::ink);
    if (slider.isDoubleClickReturnEnabled())
        g.drawLine(juce::jmin(neutral, position), middle, juce::jmax(neutral, position), middle, 2.0f);
    g.fillRoundedRectangle(position - 2.5f, middle - 8.0f, 5.0f, 16.0f, 1.5f);
    if (slider.hasKeyboardFocus(false))
        g.drawRoundedRectangle(position - 5.0f, middle - 10.5f, 10.0f, 21.0f, 3.0f, 1.0f);
}

juce::Label* Paper::createSliderTextBox(juce::Slider& slider) {
    auto* label = juce::LookAndFeel_V4::createSliderTextBox(slider);
    label->setFont(textFont(13.0f));
    label->setJustificationType(juce::Justification::centredRight);
    return label;
}

void Paper::drawButtonBackground(juce::Graphics& g, juce::Button& button, const juce::Colour&, bool over, bool down) {
    const auto area = button.getLocalBounds().toFloat().reduced(0.5f);
    g.setColour(down ? paper::rule : over ? paper::inset : paper::sheet);
    g.fillRoundedRectangle(area, 3.0f);
    g.setColour(button.hasKeyboardFocus(false) ? paper::accent : paper::ink);
    g.drawRoundedRectangle(area, 3.0f, 1.0f);
}

void Paper::drawComboBox(juce::Graphics& g, int width, int height, bool, int, int, int, int, juce::ComboBox& box) {
    const auto area = juce::Rectangle<int>(width, height).toFloat().reduced(0.5f);
    g.setColour(box.isMouseOver(true) ? paper::inset : paper::sheet);
    g.fillRoundedRectangle(area, 3.0f);
    g.setColour(box.hasKeyboardFocus(false) ? paper::accent : paper::ink);
    g.drawRoundedRectangle(area, 3.0f, 1.0f);
    const float cx = static_cast<float>(width) - 14.0f, cy = static_cast<float>(height) * 0.5f;
    juce::Path arrow;
    arrow.startNewSubPath(cx - 4.0f, cy - 2.0f);
    arrow.lineTo(cx, cy + 2.5f);
    arrow.lineTo(cx + 4.0f, cy - 2.0f);
    g.strokePath(arrow, juce::PathStrokeType(1.3f));
}

void Paper::drawTableHeaderBackground(juce::Graphics& g, juce::TableHeaderComponent& header) {
    g.fillAll(paper::sheet);
    g.setColour(paper::ink);
    g.fillRect(0, header.getHeight() - 1, header.getWidth(), 1);
}

void Paper::drawTableHeaderColumn(juce::Graphics& g, juce::TableHeaderComponent& header, const juce::String& name, int id,
                                  int width, int height, bool, bool, int) {
    // Columns of words are named "left" by a leading blank, columns of figures stand right as the figures do.
    const bool words = name.startsWithChar(' ');
    g.setColour(header.findColour(juce::TableHeaderComponent::textColourId));
    g.setFont(textFont(12.0f));
    juce::ignoreUnused(id);
    g.drawFittedText(name.trim(), 6, 0, width - 12, height - 3,
                     words ? juce::Justification::bottomLeft : juce::Justification::bottomRight, 2, 0.9f);
}

void Paper::drawScrollbar(juce::Graphics& g, juce::ScrollBar&, int x, int y, int width, int height, bool vertical,
                          int thumbStart, int thumbSize, bool over, bool down) {
    const auto thumb = vertical ? juce::Rectangle<int>(x + width / 2 - 3, thumbStart, 6, thumbSize)
                                : juce::Rectangle<int>(thumbStart, y + height / 2 - 3, thumbSize, 6);
    g.setColour(over || down ? paper::pencil : paper::rule);
    g.fillRoundedRectangle(thumb.toFloat(), 3.0f);
}

} // namespace hitchpin::editor
