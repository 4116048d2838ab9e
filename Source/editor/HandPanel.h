// The parameters, each a ruled line with its value and unit to drag or type.
#pragma once

#include "Source/plugin/Parameters.h"

#include <juce_audio_processors/juce_audio_processors.h>
#include <juce_gui_basics/juce_gui_basics.h>

#include <memory>
#include <vector>

namespace hitchpin::editor {

class HandPanel final : public juce::Component {
public:
    explicit HandPanel(const plugin::Parameters&);
    void resized() override;
    void paint(juce::Graphics&) override;
    int neededHeight() const;

private:
    struct Line {
        const plugin::ParameterRow* row;
        std::unique_ptr<juce::Label> name;
        std::unique_ptr<juce::Slider> slider;
        std::unique_ptr<juce::SliderParameterAttachment> attachment; ///< dies before its slider
    };
    std::vector<Line> lines_;
};

} // namespace hitchpin::editor
