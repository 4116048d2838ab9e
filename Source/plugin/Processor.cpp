#include "Source/plugin/Processor.h"

#include "Source/editor/Editor.h"
#include "Source/plugin/Presets.h"
#include "Source/plugin/State.h"
#include "dsp/playing/MidiEvents.h"

#include <cmath>

namespace hitchpin::plugin {

namespace {

constexpr double fadeSeconds = 0.03;      // of a player that two newer ones have followed
constexpr double gainRampSeconds = 0.02;
constexpr double longestTailSeconds = 60.0; // hosts keep processing this long after the last note

document::Instrument firstInstrument() {
    auto instrument = document::parse(firstPreset().json);
    return instrument ? std::move(instrument).value() : document::Instrument{};
}

} // namespace

Processor::Processor()
    : juce::AudioProcessor(BusesProperties().withOutput("Output", juce::AudioChannelSet::stereo(), true)),
      parameters_(*this), bench_(firstInstrument(), parameters_), relay_(bench_.handover()) {}

// ---- the window's and the host's side -----------------------------------------------------------------------------

void Processor::tell(std::vector<std::string> messages) {
    const std::lock_guard guard(messagesLock_);
    messages_ = std::move(messages);
    messageNumber_.fetch_add(1, std::memory_order_release);
}

std::vector<std::string> Processor::messages() const {
    const std::lock_guard guard(messagesLock_);
    return messages_;
}

bool Processor::take(Result<document::Instrument, document::Problems> instrument, const juce::String& whence) {
    // Described here and now, so that an instrument that cannot be made never replaces one that can.
    document::Problems problems;
    if (!instrument)
        problems = instrument.error();
    else if (const auto described = document::describe(*instrument); !described)
        problems = described.error();
    if (!problems.empty()) {
        std::vector<std::string> messages{whence.toStdString() + " was not loaded; the present instrument stays:"};
        for (const document::Problem& problem : problems)
            messages.push_back(problem.message);
        tell(std::move(messages));
        return false;
    }
    tell({});
    bench_.setInstrument(std::move(instrument).value());
    updateHostDisplay(ChangeDetails().withNonParameterStateChanged(true));
    return true;
}

bool Processor::loadInstrument(const juce::File& file) { return take(document::load(file), file.getFileName()); }

bool Processor::loadInstrument(const juce::String& json, const juce::String& whence) {
    return take(document::parse(json), whence);
}

bool Processor::saveInstrument(const juce::File& file) {
    const auto saved = document::save(bench_.instrument(), file);
    tell(saved.failed() ? std::vector<std::string>{saved.getErrorMessage().toStdString()} : std::vector<std::string>{});
    return saved.wasOk();
}

void Processor::getStateInformation(juce::MemoryBlock& block) {
    const juce::String text = stateText(bench_.instrument(), parameters_);
    block.replaceAll(text.toRawUTF8(), text.getNumBytesAsUTF8());
}

void Processor::setStateInformation(const void* data, int size) {
    if (data == nullptr || size <= 0)
        return;
    auto state = readState(juce::String::fromUTF8(static_cast<const char*>(data), size));
    if (!state) {
        std::vector<std::string> messages{"The saved state was not restored; the present instrument stays:"};
        messages.insert(messages.end(), state.error().begin(), state.error().end());
        tell(std::move(messages));
        return;
    }
    tell({});
    for (std::size_t i = 0; i < parameters_.size(); ++i)
        parameters_[i] = static_cast<float>(state->parameters[i]);
    bench_.setInstrument(std::move(state).value().instrument);
}

juce::AudioProcessorEditor* Processor::createEditor() {
    bench_.begin();
    return new editor::Editor(*this);
}

void Processor::pressKey(int key, double velocity) noexcept {
    windowKeys_.push({0, playing::Event::Kind::noteOn, 1, key, velocity});
}

void Processor::releaseKey(int key) noexcept { windowKeys_.push({0, playing::Event::Kind::noteOff, 1, key, 0.0}); }

void Processor::silenceAll() noexcept { silenceAsked_.store(true, std::memory_order_relaxed); }

bool Processor::keyHeld(int key) const noexcept {
    const auto word = meters_.heldKeys[static_cast<std::size_t>(key / 64)].load(std::memory_order_relaxed);
    return (word >> (key % 64) & 1u) != 0;
}

// ---- the audio side -----------------------------------------------------------------------------------------------

bool Processor::isBusesLayoutSupported(const BusesLayout& layout) const {
    const auto out = layout.getMainOutputChannelSet();
    return layout.inputBuses.isEmpty() && layout.outputBuses.size() == 1 &&
           (out == juce::AudioChannelSet::mono() || out == juce::AudioChannelSet::stereo());
}

void Processor::prepareToPlay(double sampleRate, int) {
    if (sampleRate != sampleRate_) {
        relay_.clear();
        sampleRate_ = sampleRate;
        bench_.setSampleRate(sampleRate);
    }
    relay_.setFadeFrames(static_cast<int>(fadeSeconds * sampleRate));
    limiter_.prepare(sampleRate);
    loadWatch_.prepare(sampleRate);
    gain_.reset(sampleRate, gainRampSeconds);
    setLatencySamples(0);
    reset();
    bench_.begin();
    if (isNonRealtime()) {
        bench_.setHurried(true);
        bench_.waitForDesign();
        takeDesigns();
    }
}

void Processor::reset() {
    relay_.reset();
    limiter_.reset();
    gain_.setCurrentAndTargetValue(parameters_.outputGain());
    for (auto& word : meters_.heldKeys)
        word.store(0, std::memory_order_relaxed);
}

/// Offline a block begins with the design that its parameters ask for, whatever the worker's pace, so that two
/// bounces are equal. Live it takes what is ready.
void Processor::takeDesigns() noexcept {
    const bool offline = isNonRealtime();
    bench_.setHurried(offline);
    if (!offline) {
        const auto fits = [this](const PreparedPlayer& next) {
            return next.madeFor.sampleRate == sampleRate_ &&
                   (relay_.current() == nullptr || next.madeFor != relay_.current()->madeFor);
        };
        if (relay_.takeNext(fits))
            tailSeconds_.store(std::min(relay_.current()->longestT60S, longestTailSeconds), std::memory_order_relaxed);
        return;
    }
    bench_.handover().collect(); // here the audio thread may free: room depends on the sound alone, not on the worker
    const auto isUpToDate = [this] {
        return relay_.current() != nullptr && relay_.current()->madeFor == bench_.wanted();
    };
    // More than one turn only where parameters move while this waits.
    for (int turn = 0; turn < 16 && !isUpToDate() && relay_.hasRoom(); ++turn) {
        if (!bench_.waitForDesign())
            return; // it cannot be made; the window says why
        if (relay_.takeNext([this](const PreparedPlayer& next) { return next.madeFor == bench_.wanted(); }))
            tailSeconds_.store(std::min(relay_.current()->longestT60S, longestTailSeconds), std::memory_order_relaxed);
        bench_.handover().collect();
    }
}

void Processor::processBlock(juce::AudioBuffer<float>& buffer, juce::MidiBuffer& midi) {
    makeBlock(buffer, midi, true);
}

/// Bypassed strings ring on unheard and nothing new is played, so that no key hangs afterwards.
void Processor::processBlockBypassed(juce::AudioBuffer<float>& buffer, juce::MidiBuffer& midi) {
    makeBlock(buffer, midi, false);
    buffer.clear();
}

void Processor::note(const playing::Event& event) noexcept {
    using Kind = playing::Event::Kind;
    if (event.kind == Kind::allNotesOff || event.kind == Kind::allSoundOff) {
        for (auto& word : meters_.heldKeys)
            word.store(0, std::memory_order_relaxed);
        return;
    }
    if (event.kind == Kind::sustain || event.key < 0 || event.key > 127)
        return;
    auto& word = meters_.heldKeys[static_cast<std::size_t>(event.key / 64)];
    const std::uint64_t bit = std::uint64_t{1} << (event.key % 64), now = word.load(std::memory_order_relaxed);
    word.store(event.kind == Kind::noteOn ? now | bit : now & ~bit, std::memory_order_relaxed);
}

void Processor::makeBlock(juce::AudioBuffer<float>& buffer, const juce::MidiBuffer& midi, bool newNotes) noexcept {
    const juce::ScopedNoDenormals noDenormals;
    const auto began = juce::Time::getHighResolutionTicks();
    const int frames = buffer.getNumSamples();
    if (sampleRate_ <= 0.0) {
        buffer.clear();
        return;
    }
    takeDesigns();
    const playing::Hand hand = parameters_.hand();
    engine::Listening listening = parameters_.listening();
    if (buffer.getNumChannels() < 2)
        listening.spread = 0.0;
    relay_.forEach([&](PreparedPlayer& prepared) {
        prepared.player.setHand(hand);
        prepared.player.listen(listening);
    });
    gain_.setTargetValue(parameters_.outputGain());

    std::size_t count = 0;
    int spanStart = 0;
    const auto add = [&](playing::Event event) {
        if (event.kind == playing::Event::Kind::noteOn && !newNotes)
            return;
        event.frame = std::clamp(event.frame, spanStart, std::max(spanStart, frames - 1));
        // Spans end where the scratch or the list of events does: never a longer block than there is room for.
        while (event.frame - spanStart >= Relay::mostFrames) {
            writeSpan(buffer, spanStart, Relay::mostFrames, count);
            spanStart += Relay::mostFrames;
            count = 0;
        }
        if (count == events_.size()) {
            writeSpan(buffer, spanStart, event.frame - spanStart, count);
            spanStart = event.frame;
            count = 0;
        }
        note(event);
        event.frame -= spanStart;
        events_[count++] = event;
    };

    if (silenceAsked_.exchange(false, std::memory_order_relaxed))
        for (int channel = 1; channel <= 16; ++channel)
            add({0, playing::Event::Kind::allSoundOff, channel, 0, 0.0});
    for (playing::Event event; windowKeys_.pop(event);)
        add(event);
    for (const auto metadata : midi)
        if (const auto event = playing::eventFromMidi(metadata.data, metadata.numBytes, metadata.samplePosition))
            add(*event);
    while (spanStart < frames || count > 0) {
        const int span = std::min(Relay::mostFrames, frames - spanStart);
        writeSpan(buffer, spanStart, span, count);
        spanStart += span;
        count = 0;
    }

    const int channels = buffer.getNumChannels();
    for (int channel = 2; channel < channels; ++channel)
        buffer.clear(channel, 0, frames);
    if (channels > 0) {
        const float least = limiter_.process(buffer.getWritePointer(0), channels > 1 ? buffer.getWritePointer(1) : nullptr,
                                             frames);
        if (least < meters_.limiterGain.load(std::memory_order_relaxed))
            meters_.limiterGain.store(least, std::memory_order_relaxed);
    }

    int ringing = 0;
    relay_.forEach([&](PreparedPlayer& prepared) { ringing += prepared.player.ringingStrings(); });
    meters_.ringingStrings.store(ringing, std::memory_order_relaxed);

    const double took = juce::Time::highResolutionTicksToSeconds(juce::Time::getHighResolutionTicks() - began);
    if (isNonRealtime())
        return; // there is time enough
    const double tooMany = loadWatch_.took(took, frames);
    if (tooMany <= 0.0 || ringing < 2)
        return; // the last string always sounds
    const int toPutOut = std::clamp(static_cast<int>(std::ceil(tooMany * ringing)), 1, ringing - 1);
    int putOut = 0;
    // The newest player's strings go last: the others only ring out.
    relay_.forEach([&](PreparedPlayer& prepared) {
        if (putOut < toPutOut)
            putOut += prepared.player.putOutQuietest(toPutOut - putOut);
    });
    meters_.stringsPutOut.fetch_add(static_cast<unsigned>(putOut), std::memory_order_relaxed);
}

void Processor::writeSpan(juce::AudioBuffer<float>& buffer, int start, int frames, std::size_t events) noexcept {
    const int channels = buffer.getNumChannels();
    relay_.process({events_.data(), events}, left_.data(), channels > 1 ? right_.data() : nullptr, frames);
    float* left = channels > 0 ? buffer.getWritePointer(0, start) : nullptr;
    float* right = channels > 1 ? buffer.getWritePointer(1, start) : nullptr;
    for (int i = 0; i < frames; ++i) {
        const double gain = gain_.getNextValue() / playing::fullScaleNewtons;
        if (left != nullptr)
            left[i] = static_cast<float>(gain * left_[static_cast<std::size_t>(i)]);
        if (right != nullptr)
            right[i] = static_cast<float>(gain * right_[static_cast<std::size_t>(i)]);
    }
}

} // namespace hitchpin::plugin

juce::AudioProcessor* JUCE_CALLTYPE createPluginFilter() { return new hitchpin::plugin::Processor; }
