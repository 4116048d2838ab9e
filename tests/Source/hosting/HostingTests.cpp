// The built plug-ins in JUCE's own host: found, played, automated, saved, restored, compared.
#include <catch2/catch.hpp>

#include <juce_audio_processors/juce_audio_processors.h>

#include <fstream>
#include <iostream>
#include <sstream>

#include <X11/Xlib.h>

namespace {

constexpr double rate = 48000.0;
constexpr int block = 512;

std::unique_ptr<juce::AudioPluginInstance> open(juce::AudioPluginFormat& format, const juce::String& file) {
    juce::OwnedArray<juce::PluginDescription> found;
    format.findAllTypesForFile(found, file);
    REQUIRE(found.size() == 1);
    CHECK(found[0]->name == "Hitchpin");
    CHECK(found[0]->isInstrument);
    juce::String error;
    auto instance = format.createInstanceFromDescription(*found[0], rate, block, error);
    INFO(error);
    REQUIRE(instance != nullptr);
    instance->setNonRealtime(true);
    instance->enableAllBuses();
    return instance;
}

std::unique_ptr<juce::AudioPluginInstance> openBuilt(const juce::String& kind) {
    if (kind == "VST3") {
        juce::VST3PluginFormat format;
        return open(format, HITCHPIN_VST3);
    }
    // The LV2 format finds a plug-in by its address, in the folders it is told to search.
    static juce::LV2PluginFormat format;
    static const bool searched = [] {
        format.searchPathsForPlugins(juce::FileSearchPath(juce::File(HITCHPIN_LV2).getParentDirectory().getFullPathName()),
                                     true, false);
        return true;
    }();
    juce::ignoreUnused(searched);
    return open(format, "https://hitchpin.example/instrument");
}

juce::AudioProcessorParameter& parameterNamed(juce::AudioPluginInstance& instance, const juce::String& name) {
    for (auto* parameter : instance.getParameters())
        if (parameter->getName(64) == name)
            return *parameter;
    throw std::runtime_error(name.toStdString());
}

/// Two seconds: a note from the start and another after a second; `automate(block)` runs before each block.
template <class Automate>
std::vector<float> render(juce::AudioPluginInstance& instance, Automate&& automate) {
    std::vector<float> sound;
    for (int i = 0; i < 188; ++i) {
        juce::AudioBuffer<float> buffer(2, block);
        juce::MidiBuffer midi;
        if (i == 2)
            midi.addEvent(juce::MidiMessage::noteOn(1, 60, juce::uint8{100}), 17);
        if (i == 94)
            midi.addEvent(juce::MidiMessage::noteOn(1, 67, juce::uint8{100}), 0);
        automate(i);
        instance.processBlock(buffer, midi);
        sound.insert(sound.end(), buffer.getReadPointer(0), buffer.getReadPointer(0) + block);
    }
    return sound;
}

float peak(const std::vector<float>& x, int from, int to) {
    float largest = 0.0f;
    for (int i = from; i < to; ++i)
        largest = std::max(largest, std::abs(x[static_cast<std::size_t>(i)]));
    return largest;
}

} // namespace

TEST_CASE("the built plug-ins play, automate, save and restore in a host") {
    const std::string kind = GENERATE("VST3", "LV2");
    CAPTURE(kind);
    auto instance = openBuilt(kind);
    CHECK(instance->acceptsMidi());
    CHECK(instance->getTotalNumOutputChannels() == 2);
    CHECK(instance->getLatencySamples() == 0);

    // Every promised parameter is there under its name.
    for (const char* name : {"Pluck point offset", "Pluck width factor", "Pluck direction offset", "Pluck force",
                             "Tension factor", "Length factor", "Temperature offset", "Pitch offset", "Damping factor",
                             "Listening direction", "Listening spread", "Output level"})
        CHECK_NOTHROW(parameterNamed(*instance, name));

    instance->prepareToPlay(rate, block);
    const auto plain = render(*instance, [](int) {});
    CHECK(peak(plain, 0, 2 * block + 17) == 0.0f); // silent up to the very sample of the note
    CHECK(peak(plain, 2 * block + 17, 20 * block) > 0.001f);
    instance->releaseResources();

    // A second bounce by a fresh instance is the same to the last bit.
    {
        auto again = openBuilt(kind);
        again->prepareToPlay(rate, block);
        CHECK((render(*again, [](int) {}) == plain));
        again->releaseResources();
    }

    // Automated: the pitch up at the second half, and once more with the level 12 dB down; the first half stays.
    const auto automate = [&](juce::AudioPluginInstance& instance, float decibels) {
        const float loud = parameterNamed(instance, "Output level").getValue();
        return render(instance, [&](int i) {
            if (i != 94)
                return;
            parameterNamed(instance, "Output level").setValueNotifyingHost(loud + decibels / 84.0f); // of −60…24 dB
            parameterNamed(instance, "Pitch offset").setValueNotifyingHost(0.75f);
        });
    };
    auto higher = openBuilt(kind);
    higher->prepareToPlay(rate, block);
    const auto raised = automate(*higher, 0.0f);
    higher->releaseResources();
    auto automated = openBuilt(kind);
    automated->prepareToPlay(rate, block);
    const auto moved = automate(*automated, -12.0f);
    CHECK(std::equal(plain.begin(), plain.begin() + 94 * block, moved.begin()));
    const float ratio = peak(moved, 100 * block, 188 * block) / peak(raised, 100 * block, 188 * block);
    std::cout << kind << ": 12 dB down measured as " << 20.0 * std::log10(ratio) << " dB\n";
    CHECK(ratio == Approx(0.2512f).epsilon(0.01));
    CHECK((raised != plain));

    // What is saved sounds the same in another instance, and saves the same again.
    juce::MemoryBlock state;
    automated->getStateInformation(state);
    REQUIRE(state.getSize() > 0);
    automated->releaseResources();
    const auto withState = [&] {
        auto restored = openBuilt(kind);
        restored->setStateInformation(state.getData(), static_cast<int>(state.getSize()));
        restored->prepareToPlay(rate, block);
        const auto sound = render(*restored, [](int) {});
        // An LV2 plug-in tells its host of restored parameters while it runs.
        CHECK(std::abs(parameterNamed(*restored, "Pitch offset").getValue() - 0.75f) < 1e-6f);
        juce::MemoryBlock again;
        restored->getStateInformation(again);
        CHECK((again == state));
        restored->releaseResources();
        return sound;
    };
    const auto first = withState();
    CHECK(peak(first, 0, 188 * block) > 0.0f);
    CHECK((first != plain));
    CHECK((withState() == first));
}

TEST_CASE("several hosted instances live side by side and close in any order") {
    const std::string kind = GENERATE("VST3", "LV2");
    CAPTURE(kind);
    std::vector<std::unique_ptr<juce::AudioPluginInstance>> instances;
    for (int i = 0; i < 3; ++i) {
        instances.push_back(openBuilt(kind));
        instances.back()->prepareToPlay(rate, block);
    }
    const auto sound = render(*instances[1], [](int) {});
    CHECK((render(*instances[2], [](int) {}) == sound));
    instances.erase(instances.begin());
    instances.erase(instances.begin() + 1);
    CHECK(peak(render(*instances[0], [](int) {}), 0, 188 * block) > 0.0f);
}

TEST_CASE("a hosted window opens and closes while strings sound and changes nothing of it") {
    const std::string kind = GENERATE("VST3", "LV2");
    CAPTURE(kind);
    auto plain = openBuilt(kind);
    plain->prepareToPlay(rate, block);
    const auto expected = render(*plain, [](int) {});

    auto instance = openBuilt(kind);
    instance->prepareToPlay(rate, block);
    REQUIRE(instance->hasEditor());
    std::unique_ptr<juce::AudioProcessorEditor> editor;
    int opened = 0;
    const auto sound = render(*instance, [&](int i) {
        if (i % 40 == 10) {
            // As JUCE's own applications do, and again since a plug-in that goes puts X's default back: on a screen
            // without a window manager some names that JUCE sets on windows do not exist, and X would end the program.
            XSetErrorHandler([](Display*, XErrorEvent*) { return 0; });
            editor.reset(instance->createEditorIfNeeded());
            REQUIRE(editor != nullptr);
            opened += editor->getWidth() > 0 && editor->getHeight() > 0 ? 1 : 0;
        } else if (i % 40 == 30) {
            editor.reset();
        }
    });
    editor.reset();
    CHECK(opened == 5);
    CHECK((sound == expected));
}
