#include "Source/plugin/Workbench.h"

#include "dsp/design/InstrumentDesign.h"

#include <chrono>

namespace hitchpin::plugin {

Workbench::Workbench(document::Instrument instrument, const Parameters& parameters)
    : parameters_(parameters), instrument_(std::make_shared<const document::Instrument>(std::move(instrument))) {
    auto view = std::make_shared<InstrumentView>();
    view->instrument = *instrument_;
    view_ = std::move(view);
}

Workbench::~Workbench() {
    leaving_.store(true, std::memory_order_relaxed);
    if (designer_)
        (*designer_)->leave(*this);
}

void Workbench::begin() {
    const std::lock_guard guard(beginning_);
    if (designer_)
        return;
    designer_.emplace();
    (*designer_)->join(*this);
}

void Workbench::setInstrument(document::Instrument instrument) {
    {
        const std::lock_guard guard(lock_);
        instrument_ = std::make_shared<const document::Instrument>(std::move(instrument));
        revision_.fetch_add(1, std::memory_order_release);
    }
    const std::lock_guard guard(beginning_);
    if (designer_)
        (*designer_)->wake();
}

document::Instrument Workbench::instrument() const {
    const std::lock_guard guard(lock_);
    return *instrument_;
}

void Workbench::setSampleRate(double sampleRate) {
    const std::lock_guard guard(lock_);
    sampleRate_.store(sampleRate, std::memory_order_relaxed);
    revision_.fetch_add(1, std::memory_order_release);
}

std::shared_ptr<const InstrumentView> Workbench::view() const {
    const std::lock_guard guard(lock_);
    return view_;
}

Wanted Workbench::wanted() const noexcept {
    Wanted wanted;
    wanted.revision = revision_.load(std::memory_order_acquire);
    wanted.sampleRate = sampleRate_.load(std::memory_order_relaxed);
    wanted.adjustments = parameters_.adjustments();
    return wanted;
}

bool Workbench::waitForDesign() {
    begin();
    std::unique_lock guard(lock_);
    while (done_ != wanted()) {
        (*designer_)->wake();
        // Woken by finish(); the limit is for parameters that are turned meanwhile.
        finished_.wait_for(guard, std::chrono::milliseconds(20));
    }
    return doneSounds_;
}

void Workbench::publish(std::shared_ptr<const InstrumentView> view) {
    const std::lock_guard guard(lock_);
    view_ = std::move(view);
    viewNumber_.fetch_add(1, std::memory_order_release);
}

void Workbench::finish(const Wanted& wanted, bool sounds) {
    {
        const std::lock_guard guard(lock_);
        done_ = wanted;
        doneSounds_ = sounds;
    }
    finished_.notify_all();
}

void Workbench::work() {
    handover_.collect();
    std::shared_ptr<const document::Instrument> instrument;
    Wanted wanted;
    {
        const std::lock_guard guard(lock_);
        wanted = this->wanted();
        if (done_ == wanted)
            return;
        instrument = instrument_;
    }
    // Parameters that move on do not stop a design, or a long automation would never be heard; a new document does.
    const auto stillWanted = [&] {
        return !leaving_.load(std::memory_order_relaxed) && wanted.revision == revision_.load(std::memory_order_acquire) &&
               (!hurried_.load(std::memory_order_relaxed) || wanted == this->wanted());
    };

    auto view = std::make_shared<InstrumentView>();
    view->instrument = *instrument;
    const auto described = document::describe(*instrument, wanted.adjustments);
    if (!described) {
        for (const document::Problem& problem : described.error())
            view->problems.push_back(problem.message);
        publish(std::move(view));
        finish(wanted, false);
        return;
    }
    view->schedule = report::makeSchedule(*instrument, *described);
    view->notHeardYet = described->notHeardYet;
    view->keys = playing::keyStates(described->instrument);
    if (wanted.sampleRate > 0.0) {
        const auto design = design::makeInstrument(described->instrument, {wanted.sampleRate, design::Quality::live},
                                                   [&](double) { return stillWanted(); });
        if (!stillWanted())
            return;
        if (design) {
            // Made in place: a player cannot be moved.
            std::unique_ptr<PreparedPlayer> prepared(
                new PreparedPlayer{wanted, (*design)->longestT60, playing::Player(*design, described->rules)});
            view->sounds = true;
            handover_.offer(std::move(prepared));
        } else {
            view->problems.push_back(design.error().message);
        }
    } else {
        view->problems.push_back("there is no open sound device yet; choose one under Options, or start the host's sound");
    }
    const bool sounds = view->sounds;
    publish(std::move(view));
    finish(wanted, sounds);
}

} // namespace hitchpin::plugin
