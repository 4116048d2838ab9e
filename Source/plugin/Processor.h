// App, VST3 and LV2: MIDI in, the strings out.
#pragma once

#include "Source/plugin/KeyQueue.h"
#include "Source/plugin/Limiter.h"
#include "Source/plugin/LoadWatch.h"
#include "Source/plugin/PlayerRelay.h"
#include "Source/plugin/Workbench.h"

#include <juce_audio_processors/juce_audio_processors.h>

#include <array>
#include <atomic>
#include <bitset>

namespace hitchpin::plugin {

class Processor final : public juce::AudioProcessor {
public:
    /// Light: hosts construct instances only to look at them.
    Processor();

    // --- for the window, from the message thread ---------------------------------------------------------------
    Workbench& bench() noexcept { return bench_; }
    const Parameters& parameters() const noexcept { return parameters_; }
    /// Reads and takes an instrument, or leaves the present one and tells why in messages().
    bool loadInstrument(const juce::File&);
    bool loadInstrument(const juce::String& json, const juce::String& whence);
    bool saveInstrument(const juce::File&);
    /// What went wrong with the last load, save or restored state; empty where all went well.
    std::vector<std::string> messages() const;
    unsigned messageNumber() const noexcept { return messageNumber_.load(std::memory_order_acquire); }

    void pressKey(int key, double velocity) noexcept;
    void releaseKey(int key) noexcept;
    void silenceAll() noexcept;

    /// What the audio thread tells. Each is a plain number that may be polled at any time.
    struct Meters {
        std::atomic<int> ringingStrings{0};
        std::atomic<float> limiterGain{1.0f};     ///< smallest since it was last set to 1 by whoever shows it
        std::atomic<unsigned> stringsPutOut{0};   ///< since the start, because the machine could not keep up
        std::array<std::atomic<std::uint64_t>, 2> heldKeys{}; ///< a bit a key
    };
    Meters& meters() noexcept { return meters_; }
    double load() const noexcept { return loadWatch_.load(); }
    bool keyHeld(int key) const noexcept;

    // --- juce::AudioProcessor -----------------------------------------------------------------------------------
    const juce::String getName() const override { return "Hitchpin"; }
    bool acceptsMidi() const override { return true; }
    bool producesMidi() const override { return false; }
    bool isBusesLayoutSupported(const BusesLayout&) const override;
    void prepareToPlay(double sampleRate, int promisedFrames) override;
    void releaseResources() override {}
    void reset() override;
    void processBlock(juce::AudioBuffer<float>&, juce::MidiBuffer&) override;
    void processBlockBypassed(juce::AudioBuffer<float>&, juce::MidiBuffer&) override;
    using juce::AudioProcessor::processBlock;
    using juce::AudioProcessor::processBlockBypassed;
    double getTailLengthSeconds() const override { return tailSeconds_.load(std::memory_order_relaxed); }
    bool hasEditor() const override { return true; }
    juce::AudioProcessorEditor* createEditor() override;
    int getNumPrograms() override { return 1; }
    int getCurrentProgram() override { return 0; }
    void setCurrentProgram(int) override {}
    const juce::String getProgramName(int) override { return {}; }
    void changeProgramName(int, const juce::String&) override {}
    void getStateInformation(juce::MemoryBlock&) override;
    void setStateInformation(const void*, int) override;

private:
    using Relay = PlayerRelay<PreparedPlayer>;

    void makeBlock(juce::AudioBuffer<float>&, const juce::MidiBuffer&, bool newNotes) noexcept;
    void takeDesigns() noexcept;
    void note(const playing::Event&) noexcept;
    void writeSpan(juce::AudioBuffer<float>&, int start, int frames, std::size_t events) noexcept;
    void tell(std::vector<std::string> messages);
    bool take(Result<document::Instrument, document::Problems>, const juce::String& whence);

    Parameters parameters_;
    Workbench bench_;
    Relay relay_;
    Limiter limiter_;
    LoadWatch loadWatch_;
    KeyQueue windowKeys_;
    Meters meters_;
    std::atomic<double> tailSeconds_{0.0};
    std::atomic<bool> silenceAsked_{false};

    // The audio thread's own.
    double sampleRate_ = 0.0;
    juce::SmoothedValue<double> gain_;
    std::array<playing::Event, Relay::mostEvents> events_{};
    std::array<double, Relay::mostFrames> left_{};
    std::array<double, Relay::mostFrames> right_{};

    mutable std::mutex messagesLock_;
    std::vector<std::string> messages_;
    std::atomic<unsigned> messageNumber_{0};
};

} // namespace hitchpin::plugin
