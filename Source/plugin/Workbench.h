// One instance's instrument on the bench: the document, what the host turns on it, and the players made from both.
#pragma once

#include "Source/plugin/Designer.h"
#include "Source/plugin/Handover.h"
#include "Source/plugin/Parameters.h"
#include "Source/report/Schedule.h"

#include <array>
#include <atomic>
#include <functional>
#include <memory>
#include <mutex>
#include <optional>
#include <string>
#include <vector>

namespace hitchpin::plugin {

/// Everything that a design depends on. The revision counts documents and sample rates.
struct Wanted {
    std::uint64_t revision = 0;
    double sampleRate = 0.0; ///< 0: not known yet, nothing can sound
    document::Adjustments adjustments;
    bool operator==(const Wanted&) const = default;
};

/// A player ready to sound, and for what it was made.
struct PreparedPlayer {
    Wanted madeFor;
    double longestT60S = 0.0;
    playing::Player player;
};

/// What the window shows of an instrument as it sounds now. Immutable, shared.
struct InstrumentView {
    document::Instrument instrument;
    report::Schedule schedule;
    std::vector<std::string> notHeardYet;
    std::vector<std::string> problems; ///< why there is no sound for it, if so
    std::array<playing::KeyState, 128> keys{};
    bool sounds = false;               ///< a player was made
};

class Workbench : private Designer::Task {
public:
    /// Light: nothing is designed before begin().
    Workbench(document::Instrument, const Parameters&);
    ~Workbench() override;
    Workbench(const Workbench&) = delete; // the designer holds its address
    Workbench& operator=(const Workbench&) = delete;

    // From any thread but the audio thread.
    void begin(); ///< joins the designer; again and again is fine
    void setInstrument(document::Instrument);
    document::Instrument instrument() const;
    void setSampleRate(double); ///< what was made for another rate is no longer wanted
    std::shared_ptr<const InstrumentView> view() const; ///< never null; counted by viewNumber()
    unsigned viewNumber() const noexcept { return viewNumber_.load(std::memory_order_acquire); }

    /// Waits until what is wanted now has been offered, or has failed. Only where waiting is allowed: offline
    /// rendering and tests. False where the design failed.
    bool waitForDesign();
    /// While true, a design that is no longer wanted is given up at once: whoever waits, waits for the latest.
    void setHurried(bool hurried) noexcept { hurried_.store(hurried, std::memory_order_relaxed); }

    // From any thread, wait-free.
    Wanted wanted() const noexcept;
    Handover<PreparedPlayer>& handover() noexcept { return handover_; }

private:
    void work() override;
    void publish(std::shared_ptr<const InstrumentView>);
    void finish(const Wanted&, bool sounds);

    const Parameters& parameters_;
    Handover<PreparedPlayer> handover_;
    std::atomic<std::uint64_t> revision_{1};
    std::atomic<double> sampleRate_{0.0};
    std::atomic<bool> leaving_{false};
    std::atomic<bool> hurried_{false};
    std::atomic<unsigned> viewNumber_{0};

    mutable std::mutex lock_; ///< never taken by the audio thread, except offline by waitForDesign()
    std::condition_variable finished_;
    std::shared_ptr<const document::Instrument> instrument_;
    std::shared_ptr<const InstrumentView> view_;
    std::optional<Wanted> done_;
    bool doneSounds_ = false;

    std::mutex beginning_;
    std::optional<juce::SharedResourcePointer<Designer>> designer_;
};

} // namespace hitchpin::plugin
