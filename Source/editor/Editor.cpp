#include "Source/editor/Editor.h"

#include "Source/plugin/Presets.h"

namespace hitchpin::editor {

namespace {

constexpr int margin = 16, handWidth = 320, keysHeight = 92, statusHeight = 24;
constexpr juce::uint32 limiterShownMs = 1500, overloadShownMs = 6000;

juce::String fromUtf8(const std::string& text) { return juce::String::fromUTF8(text.c_str()); }

juce::String summaryOf(const plugin::InstrumentView& view) {
    int strings = 0;
    for (const auto& course : view.schedule.courses)
        strings += course.strings;
    const int courses = static_cast<int>(view.schedule.courses.size());
    if (courses == 0)
        return {};
    juce::String text;
    text << courses << (courses == 1 ? " course, " : " courses, ") << strings << (strings == 1 ? " string" : " strings");
    const double total = view.schedule.totalTensionN;
    text << ", " << (total < 1000.0 ? juce::String(juce::roundToInt(total)) + " N" : juce::String(total / 1000.0, 2) + " kN")
         << " of tension in all";
    return text;
}

} // namespace

Editor::Editor(plugin::Processor& owner)
    : juce::AudioProcessorEditor(owner), processor_(owner), hand_(owner.parameters()), keys_(owner) {
    setLookAndFeel(&paper_);
    // The app's own frame and dialogs are of the same paper; a host's windows are the host's.
    if (owner.wrapperType == juce::AudioProcessor::wrapperType_Standalone)
        juce::LookAndFeel::setDefaultLookAndFeel(&paper_);
    name_.setFont(titleFont());
    name_.setMinimumHorizontalScale(0.7f);
    summary_.setFont(textFont(13.5f));
    summary_.setColour(juce::Label::textColourId, paper::pencil);
    status_.setFont(textFont(13.0f));
    notesHeading_.setFont(textFont(12.0f));
    notesHeading_.setColour(juce::Label::textColourId, paper::pencil);
    notesHeading_.setText("Notes", juce::dontSendNotification);
    keysLegend_.setFont(textFont(12.0f));
    keysLegend_.setColour(juce::Label::textColourId, paper::pencil);
    keysLegend_.setJustificationType(juce::Justification::centredRight);
    keysLegend_.setText("Keys with a bar are stopped at a fret, grey ones have no string", juce::dontSendNotification);
    for (auto* label : {&name_, &summary_, &status_, &notesHeading_, &keysLegend_}) {
        label->setBorderSize(juce::BorderSize<int>(0));
        addAndMakeVisible(*label);
    }

    presets_.setTextWhenNothingSelected("Choose an instrument");
    presets_.setTitle("Presets");
    for (std::size_t i = 0; i < plugin::presets().size(); ++i)
        presets_.addItem(plugin::presets()[i].name, static_cast<int>(i) + 1);
    presets_.onChange = [this] { choosePreset(); };
    load_.onClick = [this] { chooseFileToLoad(); };
    load_.setTooltip("Load an instrument file");
    save_.onClick = [this] { chooseFileToSave(); };
    save_.setTooltip("Save this instrument as a file (what the parameters turn stays with the session)");
    silence_.onClick = [this] { processor_.silenceAll(); };
    silence_.setTooltip("Put every string out at once");
    for (juce::Component* component : std::initializer_list<juce::Component*>{&presets_, &load_, &save_, &silence_,
                                                                              &schedule_, &notes_, &handView_, &keys_})
        addAndMakeVisible(*component);

    notes_.setMultiLine(true, true);
    notes_.setReadOnly(true);
    notes_.setCaretVisible(false);
    notes_.setFont(textFont(13.0f));
    notes_.setColour(juce::TextEditor::backgroundColourId, paper::sheet);
    notes_.setTitle("Notes");
    handView_.setViewedComponent(&hand_, false);
    handView_.setScrollBarsShown(true, false);

    sendLookAndFeelChange(); // the controls were made before they had a parent to draw like
    setResizable(true, true);
    setResizeLimits(760, 560, 3200, 2400);
    setSize(1240, 780);
    putOutSeen_ = owner.meters().stringsPutOut.load(std::memory_order_relaxed);
    refresh();
    startTimerHz(20);
}

Editor::~Editor() {
    stopTimer();
    setLookAndFeel(nullptr);
    if (&juce::LookAndFeel::getDefaultLookAndFeel() == &paper_)
        juce::LookAndFeel::setDefaultLookAndFeel(nullptr);
}

void Editor::parentHierarchyChanged() {
    if (processor_.wrapperType != juce::AudioProcessor::wrapperType_Standalone)
        return;
    // The frame was there first and drawn otherwise. Later, since it is only now being put together.
    juce::MessageManager::callAsync([safe = juce::Component::SafePointer<Editor>(this)] {
        if (safe == nullptr)
            return;
        if (auto* frame = dynamic_cast<juce::DocumentWindow*>(safe->getTopLevelComponent())) {
            frame->setBackgroundColour(paper::sheet);
            frame->sendLookAndFeelChange();
        }
    });
}

void Editor::paint(juce::Graphics& g) {
    g.fillAll(paper::sheet);
    g.setColour(paper::ink);
    g.fillRect(margin, 74, getWidth() - 2 * margin, 1);
    g.setColour(paper::rule);
    g.fillRect(getWidth() - margin - handWidth - margin / 2, 84, 1, getHeight() - keysHeight - statusHeight - 84 - margin);
}

void Editor::resized() {
    auto area = getLocalBounds().reduced(margin, 12);
    auto title = area.removeFromTop(56);
    auto buttons = title.removeFromRight(std::min(430, title.getWidth() / 2)).withSizeKeepingCentre(
        std::min(430, title.getWidth()), 30);
    silence_.setBounds(buttons.removeFromRight(76));
    buttons.removeFromRight(8);
    save_.setBounds(buttons.removeFromRight(60));
    buttons.removeFromRight(8);
    load_.setBounds(buttons.removeFromRight(60));
    buttons.removeFromRight(8);
    presets_.setBounds(buttons);
    name_.setBounds(title.removeFromTop(34));
    summary_.setBounds(title);
    area.removeFromTop(14);

    keys_.setBounds(area.removeFromBottom(keysHeight));
    area.removeFromBottom(6);
    auto status = area.removeFromBottom(statusHeight);
    keysLegend_.setBounds(status.removeFromRight(handWidth + 30));
    status_.setBounds(status);
    area.removeFromBottom(6);

    auto hand = area.removeFromRight(handWidth);
    handView_.setBounds(hand);
    const bool scrolls = hand_.neededHeight() > hand.getHeight();
    hand_.setSize(handWidth - (scrolls ? 10 : 0), hand_.neededHeight());
    area.removeFromRight(margin);

    auto notes = area.removeFromBottom(juce::jlimit(70, 170, area.getHeight() / 4));
    notesHeading_.setBounds(notes.removeFromTop(20));
    notes_.setBounds(notes);
    schedule_.setBounds(area);
}

void Editor::timerCallback() {
    if (viewShown_ != processor_.bench().viewNumber() || messageShown_ != processor_.messageNumber())
        refresh();
    keys_.followPlaying();
    refreshStatus();
}

void Editor::refresh() {
    // Numbers first: what comes in between is shown at the next turn.
    const unsigned viewNumber = processor_.bench().viewNumber();
    messageShown_ = processor_.messageNumber();
    const auto view = processor_.bench().view();
    const auto name = fromUtf8(view->instrument.name);
    name_.setText(name.isNotEmpty() ? name : juce::String("Unnamed instrument"), juce::dontSendNotification);
    summary_.setText(summaryOf(*view), juce::dontSendNotification);
    int chosen = 0;
    for (std::size_t i = 0; i < plugin::presets().size(); ++i)
        if (plugin::presets()[i].name == name)
            chosen = static_cast<int>(i) + 1;
    presets_.setSelectedId(chosen, juce::dontSendNotification);
    if (viewNumber != viewShown_ || viewNumber == 0) {
        schedule_.show(view);
        keys_.show(view);
    }
    viewShown_ = viewNumber;

    notes_.clear();
    const auto write = [this](const std::string& text, juce::Colour colour) {
        notes_.setColour(juce::TextEditor::textColourId, colour);
        notes_.insertTextAtCaret(fromUtf8(text) + "\n");
    };
    for (const auto& message : processor_.messages())
        write(message, paper::accent);
    for (const auto& problem : view->problems)
        write("No sound: " + problem, paper::accent);
    for (const auto& course : view->schedule.courses)
        for (const auto& warning : course.warnings)
            write(course.note + ": " + warning, paper::accent);
    for (const auto& caution : view->schedule.warnings)
        write(caution, paper::ink);
    for (const auto& sentence : view->notHeardYet)
        write("Not heard yet: " + sentence, paper::ink);
    if (!view->instrument.remarks.empty())
        write(view->instrument.remarks, paper::pencil);
    notes_.setCaretPosition(0);
}

void Editor::refreshStatus() {
    auto& meters = processor_.meters();
    const auto now = juce::Time::getMillisecondCounter();
    if (const float gain = meters.limiterGain.exchange(1.0f, std::memory_order_relaxed); gain < 1.0f) {
        limiterGain_ = now < limiterUntil_ ? std::min(limiterGain_, gain) : gain;
        limiterUntil_ = now + limiterShownMs;
    }
    if (const unsigned putOut = meters.stringsPutOut.load(std::memory_order_relaxed); putOut != putOutSeen_) {
        putOutSeen_ = putOut;
        overloadUntil_ = now + overloadShownMs;
    }
    const int ringing = meters.ringingStrings.load(std::memory_order_relaxed);
    juce::String text;
    text << ringing << (ringing == 1 ? " string ringing" : " strings ringing") << "    "
         << "load " << juce::roundToInt(100.0 * processor_.load()) << " %";
    const bool limits = now < limiterUntil_, overloaded = now < overloadUntil_;
    if (limits)
        text << "    Limiter: held back by " << juce::String(-juce::Decibels::gainToDecibels(limiterGain_), 1)
             << " dB; lower the output level";
    if (overloaded)
        text = "This is more than the machine can run: the quietest strings are put out so that the rest sounds clean.";
    status_.setText(text, juce::dontSendNotification);
    status_.setColour(juce::Label::textColourId, limits || overloaded ? paper::accent : paper::pencil);
}

void Editor::choosePreset() {
    const int index = presets_.getSelectedId() - 1;
    if (index < 0 || index >= static_cast<int>(plugin::presets().size()))
        return;
    const auto& preset = plugin::presets()[static_cast<std::size_t>(index)];
    processor_.loadInstrument(preset.json, preset.file);
}

void Editor::chooseFileToLoad() {
    chooser_ = std::make_unique<juce::FileChooser>("Load an instrument file", juce::File(), "*.json");
    chooser_->launchAsync(juce::FileBrowserComponent::openMode | juce::FileBrowserComponent::canSelectFiles,
                          [safe = juce::Component::SafePointer<Editor>(this)](const juce::FileChooser& chooser) {
                              if (safe != nullptr && chooser.getResult() != juce::File())
                                  safe->processor_.loadInstrument(chooser.getResult());
                          });
}

void Editor::chooseFileToSave() {
    const auto name = juce::File::createLegalFileName(fromUtf8(processor_.bench().instrument().name).toLowerCase()
                                                          .replaceCharacter(' ', '-'));
    const auto folder = juce::File::getSpecialLocation(juce::File::userDocumentsDirectory);
    chooser_ = std::make_unique<juce::FileChooser>("Save the instrument file",
                                                   folder.getChildFile((name.isEmpty() ? "instrument" : name) + ".json"),
                                                   "*.json");
    chooser_->launchAsync(juce::FileBrowserComponent::saveMode | juce::FileBrowserComponent::canSelectFiles |
                              juce::FileBrowserComponent::warnAboutOverwriting,
                          [safe = juce::Component::SafePointer<Editor>(this)](const juce::FileChooser& chooser) {
                              if (safe != nullptr && chooser.getResult() != juce::File())
                                  safe->processor_.saveInstrument(chooser.getResult().withFileExtension("json"));
                          });
}

} // namespace hitchpin::editor
