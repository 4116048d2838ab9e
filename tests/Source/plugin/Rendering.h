// Plays a processor as an offline host would.
#pragma once

#include "Source/plugin/Processor.h"

#include <vector>

namespace hitchpin::testing {

/// Three nylon strings an octave and a fifth apart, one with a damper, one with frets: small, so designed quickly.
inline const char* smallInstrument = R"({
  "format": "hitchpin-instrument", "version": 1, "name": "Three strings",
  "courses": [
    { "note": "A2", "speaking_length_mm": 650.0, "core": { "material": "music wire", "diameter_mm": 0.80 } },
    { "note": "A3", "speaking_length_mm": 600.0, "core": { "material": "music wire", "diameter_mm": 0.40 }, "damper": true },
    { "note": "E4", "speaking_length_mm": 550.0, "core": { "material": "music wire", "diameter_mm": 0.30 }, "frets": 3 }
  ]
})";
inline constexpr int openKeys[] = {45, 57, 64};

struct Sound {
    std::vector<float> left, right;
    bool operator==(const Sound&) const = default;
};

/// One note on at `frame`.
struct Note {
    int frame;
    int key;
    int velocity = 100; ///< 0: off
};

/// Offline: each block waits for its design.
inline void makeReady(plugin::Processor& processor, double sampleRate = 48000.0, int channels = 2, int promised = 512) {
    juce::AudioProcessor::BusesLayout layout;
    layout.outputBuses.add(channels == 1 ? juce::AudioChannelSet::mono() : juce::AudioChannelSet::stereo());
    processor.setBusesLayout(layout);
    processor.setNonRealtime(true);
    processor.setRateAndBufferSizeDetails(sampleRate, promised);
    processor.prepareToPlay(sampleRate, promised);
}

/// `beforeBlock(frame)` may turn parameters.
template <class BeforeBlock>
Sound play(plugin::Processor& processor, const std::vector<Note>& notes, int frames, int blockFrames,
           BeforeBlock&& beforeBlock) {
    const int channels = processor.getTotalNumOutputChannels();
    Sound sound;
    for (int start = 0; start < frames; start += blockFrames) {
        const int length = std::min(blockFrames, frames - start);
        juce::AudioBuffer<float> buffer(channels, length);
        juce::MidiBuffer midi;
        for (const Note& note : notes)
            if (note.frame >= start && note.frame < start + length)
                midi.addEvent(note.velocity > 0
                                  ? juce::MidiMessage::noteOn(1, note.key, static_cast<juce::uint8>(note.velocity))
                                  : juce::MidiMessage::noteOff(1, note.key),
                              note.frame - start);
        beforeBlock(start);
        processor.processBlock(buffer, midi);
        sound.left.insert(sound.left.end(), buffer.getReadPointer(0), buffer.getReadPointer(0) + length);
        if (channels > 1)
            sound.right.insert(sound.right.end(), buffer.getReadPointer(1), buffer.getReadPointer(1) + length);
    }
    return sound;
}

inline Sound play(plugin::Processor& processor, const std::vector<Note>& notes, int frames, int blockFrames = 512) {
    return play(processor, notes, frames, blockFrames, [](int) {});
}

inline double peak(const std::vector<float>& x, std::size_t from = 0, std::size_t to = ~std::size_t{0}) {
    double largest = 0.0;
    for (std::size_t i = from; i < std::min(to, x.size()); ++i)
        largest = std::max(largest, static_cast<double>(std::abs(x[i])));
    return largest;
}

inline juce::AudioParameterFloat& parameter(plugin::Processor& processor, const char* id) {
    for (std::size_t i = 0; i < plugin::parameterTable().size(); ++i)
        if (juce::String(plugin::parameterTable()[i].id) == id)
            return processor.parameters()[i];
    throw std::runtime_error(id);
}

} // namespace hitchpin::testing
