#include "Source/console/AudioFile.h"

#include "Source/document/WholeFile.h"

#include <cmath>

namespace hitchpin::console {

namespace {

constexpr int block = 4096;

/// A writer owns its stream; the file behind this one belongs to someone else.
class Borrowed final : public juce::OutputStream {
public:
    explicit Borrowed(juce::OutputStream& stream) : stream_(stream) {}
    void flush() override { stream_.flush(); }
    bool setPosition(juce::int64 position) override { return stream_.setPosition(position); }
    juce::int64 getPosition() override { return stream_.getPosition(); }
    bool write(const void* data, std::size_t size) override { return stream_.write(data, size); }

private:
    juce::OutputStream& stream_;
};

bool pour(juce::OutputStream& out, const AudioFileFormat& format, const Source& source, Written& written) {
    juce::WavAudioFormat wav;
    juce::FlacAudioFormat flac;
    juce::AudioFormat& kind = format.flac ? static_cast<juce::AudioFormat&>(flac) : wav;
    auto stream = std::make_unique<Borrowed>(out);
    const std::unique_ptr<juce::AudioFormatWriter> writer(
        kind.createWriterFor(stream.get(), format.sampleRate, 2, format.bits, {}, 0));
    if (writer == nullptr)
        return false;
    stream.release(); // the writer's now
    juce::AudioBuffer<float> sound(2, block);
    for (;;) {
        const int count = source(sound.getWritePointer(0), sound.getWritePointer(1), block);
        if (count < 0)
            return false;
        if (count == 0)
            return true;
        for (int side = 0; side < 2; ++side)
            for (int i = 0; i < count; ++i) {
                const double level = std::abs(sound.getSample(side, i));
                written.peak = std::max(written.peak, level);
                written.clipped += level > 1.0 ? 1 : 0;
            }
        written.frames += count;
        if (!writer->writeFromAudioSampleBuffer(sound, 0, count))
            return false;
    }
}

} // namespace

juce::Result writeAudio(const juce::File& file, const AudioFileFormat& format, const Source& source, Written& written) {
    return document::writeWhole(
        file, [&](juce::OutputStream& out) { return pour(out, format, source, written); });
}

} // namespace hitchpin::console
