// Keys pressed in the window, on their way to the audio thread.
#pragma once

#include "dsp/playing/Player.h"

#include <juce_core/juce_core.h>

#include <array>

namespace hitchpin::plugin {

/// One writer (the message thread), one reader (the audio thread), wait-free; what does not fit is left out.
class KeyQueue {
public:
    void push(const playing::Event& event) noexcept {
        const auto scope = fifo_.write(1);
        if (scope.blockSize1 > 0)
            events_[static_cast<std::size_t>(scope.startIndex1)] = event;
        else if (scope.blockSize2 > 0)
            events_[static_cast<std::size_t>(scope.startIndex2)] = event;
    }

    bool pop(playing::Event& event) noexcept {
        const auto scope = fifo_.read(1);
        if (scope.blockSize1 + scope.blockSize2 == 0)
            return false;
        event = events_[static_cast<std::size_t>(scope.blockSize1 > 0 ? scope.startIndex1 : scope.startIndex2)];
        return true;
    }

private:
    static constexpr int capacity = 128;
    juce::AbstractFifo fifo_{capacity};
    std::array<playing::Event, capacity> events_{};
};

} // namespace hitchpin::plugin
