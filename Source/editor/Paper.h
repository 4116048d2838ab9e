// Ink on paper: the colours, type and few strokes from which the window is drawn.
#pragma once

#include <juce_gui_basics/juce_gui_basics.h>

namespace hitchpin::editor {

namespace paper {
inline const juce::Colour sheet{0xfffbf9f4};   ///< the paper
inline const juce::Colour inset{0xfff3efe6};   ///< paper in shade: fields to write in
inline const juce::Colour ink{0xff1f2428};
inline const juce::Colour pencil{0xff6b6962};  ///< second words; 5:1 on the sheet
inline const juce::Colour rule{0xffd8d2c4};    ///< thin lines
inline const juce::Colour accent{0xffa8321f};  ///< the red pencil: what is held, what is wrong
} // namespace paper

juce::Font textFont(float height = 14.0f);
juce::Font figureFont(float height = 13.0f); ///< figures of one width, for columns
juce::Font titleFont(float height = 26.0f);

/// Draws JUCE's controls in ink. Used by the window and everything in it.
class Paper final : public juce::LookAndFeel_V4 {
public:
    Paper();

    void drawLinearSlider(juce::Graphics&, int x, int y, int width, int height, float position, float least, float most,
                          juce::Slider::SliderStyle, juce::Slider&) override;
    juce::Label* createSliderTextBox(juce::Slider&) override;
    int getSliderThumbRadius(juce::Slider&) override { return 6; }
    void drawButtonBackground(juce::Graphics&, juce::Button&, const juce::Colour&, bool over, bool down) override;
    juce::Font getTextButtonFont(juce::TextButton&, int) override { return textFont(); }
    void drawComboBox(juce::Graphics&, int width, int height, bool down, int, int, int, int, juce::ComboBox&) override;
    juce::Font getComboBoxFont(juce::ComboBox&) override { return textFont(); }
    juce::Font getPopupMenuFont() override { return textFont(); }
    void drawTableHeaderBackground(juce::Graphics&, juce::TableHeaderComponent&) override;
    void drawTableHeaderColumn(juce::Graphics&, juce::TableHeaderComponent&, const juce::String& name, int id, int width,
                               int height, bool over, bool down, int flags) override;
    void drawScrollbar(juce::Graphics&, juce::ScrollBar&, int x, int y, int width, int height, bool vertical,
                       int thumbStart, int thumbSize, bool over, bool down) override;
};

} // namespace hitchpin::editor
