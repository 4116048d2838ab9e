#include "Source/editor/Keyboard.h"

#include "Source/editor/Paper.h"

namespace hitchpin::editor {

PressedKeys::PressedKeys(plugin::Processor& target) : target_(target) { pressed.addListener(this); }

PressedKeys::~PressedKeys() {
    for (int key = 0; key < 128; ++key) // the window may close while a key is down: no string is held for ever
        if (pressed.isNoteOn(1, key))
            target_.releaseKey(key);
    pressed.removeListener(this);
}

void PressedKeys::handleNoteOn(juce::MidiKeyboardState*, int, int key, float velocity) {
    target_.pressKey(key, juce::jlimit(1.0, 127.0, static_cast<double>(velocity) * 127.0));
}

void PressedKeys::handleNoteOff(juce::MidiKeyboardState*, int, int key, float) { target_.releaseKey(key); }

Keyboard::Keyboard(plugin::Processor& processor)
    : PressedKeys(processor), juce::MidiKeyboardComponent(pressed, horizontalKeyboard), processor_(processor) {
    setOctaveForMiddleC(4); // C4 is key 60, as everywhere in Hitchpin
    setScrollButtonsVisible(true);
    setScrollButtonWidth(18);
    setColour(whiteNoteColourId, paper::sheet);
    setColour(keySeparatorLineColourId, juce::Colours::transparentBlack);
    setColour(shadowColourId, juce::Colours::transparentBlack);
    setColour(upDownButtonBackgroundColourId, paper::inset);
    setColour(upDownButtonArrowColourId, paper::ink);
    setTitle("Keys");
}

void Keyboard::show(std::shared_ptr<const plugin::InstrumentView> view) {
    view_ = std::move(view);
    fitRange();
    repaint();
}

void Keyboard::fitRange() {
    int lowest = 128, highest = -1;
    for (int key = 0; key < 128; ++key)
        if (stateOf(key) != playing::KeyState::silent) {
            lowest = std::min(lowest, key);
            highest = std::max(highest, key);
        }
    if (highest < 0) {
        lowest = 48;
        highest = 72;
    }
    // Whole octaves around what can be played, three at least.
    lowest = std::max(0, lowest / 12 * 12);
    highest = std::min(127, highest / 12 * 12 + 11);
    while (highest - lowest < 35) {
        lowest = std::max(0, lowest - 12);
        if (highest - lowest < 35)
            highest = std::min(127, highest + 12);
    }
    setAvailableRange(lowest, highest);
    int whites = 0;
    for (int key = lowest; key <= highest; ++key)
        whites += juce::MidiMessage::isMidiNoteBlack(key) ? 0 : 1;
    const float width = static_cast<float>(std::max(1, getWidth()));
    setKeyWidth(juce::jlimit(12.0f, 60.0f, width / static_cast<float>(whites)));
    setLowestVisibleKey(lowest);
    setKeyPressBaseOctave(juce::jlimit(0, 9, (lowest + highest) / 2 / 12));
}

void Keyboard::resized() {
    fitRange();
    juce::MidiKeyboardComponent::resized();
}

void Keyboard::followPlaying() {
    for (int key = getRangeStart(); key <= getRangeEnd(); ++key) {
        const bool held = processor_.keyHeld(key);
        if (held != drawnHeld_[static_cast<std::size_t>(key)]) {
            drawnHeld_[static_cast<std::size_t>(key)] = held;
            repaint(getRectangleForKey(key).getSmallestIntegerContainer());
        }
    }
}

playing::KeyState Keyboard::stateOf(int key) const noexcept {
    return view_ != nullptr ? view_->keys[static_cast<std::size_t>(key)] : playing::KeyState::silent;
}

void Keyboard::drawWhiteNote(int key, juce::Graphics& g, juce::Rectangle<float> area, bool down, bool over, juce::Colour,
                             juce::Colour) {
    const auto takes = stateOf(key);
    const bool held = down || processor_.keyHeld(key);
    g.setColour(held && takes != playing::KeyState::silent ? paper::accent
                : takes == playing::KeyState::silent       ? paper::rule
                : over                                     ? paper::inset
                                                           : juce::Colours::white);
    g.fillRect(area);
    g.setColour(paper::pencil);
    g.drawRect(area.expanded(0.5f, 0.0f), 1.0f);
    if (takes == playing::KeyState::stopped) {
        g.setColour(held ? juce::Colours::white : paper::pencil);
        g.fillRect(area.withSizeKeepingCentre(area.getWidth() * 0.5f, 2.0f).withY(area.getBottom() - 22.0f));
    }
    if (key % 12 == 0) {
        g.setColour(held ? juce::Colours::white : paper::pencil);
        g.setFont(textFont(11.0f));
        g.drawText(juce::MidiMessage::getMidiNoteName(key, true, true, 4), area.withTop(area.getBottom() - 18.0f),
                   juce::Justification::centred, false);
    }
}

void Keyboard::drawBlackNote(int key, juce::Graphics& g, juce::Rectangle<float> area, bool down, bool over, juce::Colour) {
    const auto takes = stateOf(key);
    const bool held = down || processor_.keyHeld(key);
    g.setColour(held && takes != playing::KeyState::silent ? paper::accent
                : takes == playing::KeyState::silent       ? paper::rule.darker(0.25f)
                : over                                     ? paper::pencil
                                                           : paper::ink);
    g.fillRect(area);
    if (takes == playing::KeyState::stopped) {
        g.setColour(paper::sheet);
        g.fillRect(area.withSizeKeepingCentre(area.getWidth() * 0.5f, 2.0f).withY(area.getBottom() - 10.0f));
    }
}

} // namespace hitchpin::editor
