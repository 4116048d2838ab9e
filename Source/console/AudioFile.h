// Sound to a WAV or FLAC file at a stated physical level, there whole or not at all.
#pragma once

#include <juce_audio_formats/juce_audio_formats.h>

#include <functional>
#include <string>

namespace hitchpin::console {

struct AudioFileFormat {
    double sampleRate = 48000.0;
    int bits = 32; ///< 16, 24, or 32 for floating point
    bool flac = false;
};

/// How loud it was.
struct Written {
    double peak = 0.0;        ///< of full scale
    std::int64_t frames = 0;
    std::int64_t clipped = 0; ///< samples over full scale, cut off in whole-number formats
};

/// Fills both sides with up to `frames` samples, 1 at full scale, and returns how many there were: 0 at the end,
/// under 0 when the work was stopped.
using Source = std::function<int(float* left, float* right, int frames)>;

/// Stereo. On failure or a stop, no file and no half of one is left.
juce::Result writeAudio(const juce::File&, const AudioFileFormat&, const Source&, Written&);

} // namespace hitchpin::console
