#include "Source/editor/HandPanel.h"

#include "Source/editor/Paper.h"

namespace hitchpin::editor {

namespace {
constexpr int lineHeight = 26, headingHeight = 24, nameWidth = 148, valueWidth = 78;
}

HandPanel::HandPanel(const plugin::Parameters& parameters) {
    const auto table = plugin::parameterTable();
    for (std::size_t i = 0; i < table.size(); ++i) {
        const plugin::ParameterRow& row = table[i];
        Line line{&row, std::make_unique<juce::Label>(), std::make_unique<juce::Slider>(), nullptr};
        const auto meaning = juce::String::fromUTF8(row.meaning);
        line.name->setText(row.name, juce::dontSendNotification);
        line.name->setFont(textFont(13.5f));
        line.name->setTooltip(meaning);
        line.name->setBorderSize(juce::BorderSize<int>(0));
        line.slider->setSliderStyle(juce::Slider::LinearHorizontal);
        line.slider->setTextBoxStyle(juce::Slider::TextBoxRight, false, valueWidth, lineHeight - 4);
        line.slider->setTitle(row.name);
        line.slider->setTooltip(meaning);
        line.slider->setWantsKeyboardFocus(true);
        addAndMakeVisible(*line.name);
        addAndMakeVisible(*line.slider);
        line.attachment = std::make_unique<juce::SliderParameterAttachment>(parameters[i], *line.slider);
        line.slider->setDoubleClickReturnValue(true, row.neutral);
        lines_.push_back(std::move(line));
    }
}

int HandPanel::neededHeight() const {
    int height = 0;
    for (std::size_t i = 0; i < lines_.size(); ++i)
        height += lineHeight + (i == 0 || lines_[i].row->group != lines_[i - 1].row->group ? headingHeight : 0);
    return height;
}

void HandPanel::resized() {
    int y = 0;
    for (std::size_t i = 0; i < lines_.size(); ++i) {
        if (i == 0 || lines_[i].row->group != lines_[i - 1].row->group)
            y += headingHeight;
        lines_[i].name->setBounds(0, y, nameWidth, lineHeight);
        lines_[i].slider->setBounds(nameWidth, y, getWidth() - nameWidth, lineHeight);
        y += lineHeight;
    }
}

void HandPanel::paint(juce::Graphics& g) {
    int y = 0;
    for (std::size_t i = 0; i < lines_.size(); ++i) {
        if (i == 0 || lines_[i].row->group != lines_[i - 1].row->group) {
            g.setColour(paper::pencil);
            g.setFont(textFont(12.0f));
            g.drawText(plugin::groupName(lines_[i].row->group), 0, y, getWidth(), headingHeight - 5,
                       juce::Justification::bottomLeft, false);
            g.setColour(paper::rule);
            g.fillRect(0, y + headingHeight - 3, getWidth(), 1);
            y += headingHeight;
        }
        y += lineHeight;
    }
}

} // namespace hitchpin::editor
