// Which players sound: the newest goes on with the strings of the one before, or where it cannot, takes the keys while
// that one rings on.
#pragma once

#include "Source/plugin/Handover.h"
#include "dsp/playing/Player.h"

#include <algorithm>
#include <array>
#include <cassert>
#include <span>

namespace hitchpin::plugin {

/// The audio thread's end of a handover. `Prepared` has a member `player` with playing::Player's process(), takeOver(),
/// takingOver(), reset() and silent(); a plain template, so that the exchange can be tested without a whole instrument.
///
/// A new player takes every note from now on. Where it has the same strings, changed, it takes over those that ring and all
/// keys and pedals; the one before is kept, silent, until that is done. Where it has others, the one before keeps ringing,
/// hears of releases and pedals but of no new notes, and goes when it is silent; when yet another such comes it is faded
/// out instead. So at most three sound, and there is never a step in the sound.
///
/// Everything but the destructor and clear() is real-time safe.
template <class Prepared>
class PlayerRelay {
public:
    static constexpr int mostFrames = 512;  ///< a call of process()
    static constexpr int mostEvents = 256;  ///< a call of process()

    explicit PlayerRelay(Handover<Prepared>& handover) : handover_(handover) {}
    ~PlayerRelay() { clear(); }
    PlayerRelay(const PlayerRelay&) = delete; // owns players by address
    PlayerRelay& operator=(const PlayerRelay&) = delete;

    void setFadeFrames(int frames) noexcept { fadeFrames_ = std::max(1, frames); }

    /// Takes what waits, if there is room and `accept(prepared)` says so; what is refused goes straight back.
    /// True where a new player has the keys now.
    template <class Accept>
    bool takeNext(Accept&& accept) noexcept {
        returnSpent();
        if (!hasRoom())
            return false;
        Prepared* next = handover_.take();
        if (next == nullptr)
            return false;
        if (!accept(static_cast<const Prepared&>(*next))) {
            fading_ = next;
            fadeLeft_ = 0;
            returnSpent();
            return false;
        }
        if (current_ != nullptr && next->player.takeOver(current_->player)) {
            yielding_ = current_;
            current_ = next;
            return true;
        }
        fading_ = ringing_;
        fadeLeft_ = fading_ != nullptr ? fadeFrames_ : 0;
        ringing_ = current_;
        current_ = next;
        pedalsToTell_ = true;
        return true;
    }

    /// Whether a new player could be taken now: not while one is being faded out or taken over.
    bool hasRoom() const noexcept { return fading_ == nullptr && yielding_ == nullptr; }

    const Prepared* current() const noexcept { return current_; }

    /// Does something to every player that sounds, the newest first.
    template <class Action>
    void forEach(Action&& action) noexcept {
        for (Prepared* prepared : {current_, ringing_, fading_})
            if (prepared != nullptr)
                action(*prepared);
    }

    /// Writes `frames` ≤ mostFrames; at most mostEvents events by rising frame. `right` may be null.
    void process(std::span<const playing::Event> events, double* left, double* right, int frames) noexcept {
        assert(frames <= mostFrames && static_cast<int>(events.size()) <= mostEvents);
        std::size_t toAll = 0, toNewest = 0;
        if (pedalsToTell_) {
            for (std::size_t channel = 0; channel < pedals_.size(); ++channel)
                if (pedals_[channel] > 0.0)
                    newest_[toNewest++] = {0, playing::Event::Kind::sustain, static_cast<int>(channel) + 1, 0,
                                           pedals_[channel]};
            pedalsToTell_ = false;
        }
        for (const playing::Event& event : events) {
            newest_[toNewest++] = event;
            if (event.kind != playing::Event::Kind::noteOn)
                earlier_[toAll++] = event;
            if (event.kind == playing::Event::Kind::sustain && event.channel >= 1 && event.channel <= 16)
                pedals_[static_cast<std::size_t>(event.channel - 1)] = event.value;
        }
        const std::span<const playing::Event> forNewest{newest_.data(), toNewest}, forEarlier{earlier_.data(), toAll};

        std::fill_n(left, frames, 0.0);
        if (right != nullptr)
            std::fill_n(right, frames, 0.0);
        if (current_ != nullptr)
            current_->player.process(forNewest, left, right, frames);
        if (ringing_ != nullptr) {
            ringing_->player.process(forEarlier, left_.data(), right != nullptr ? right_.data() : nullptr, frames);
            for (int i = 0; i < frames; ++i)
                left[i] += left_[static_cast<std::size_t>(i)];
            for (int i = 0; right != nullptr && i < frames; ++i)
                right[i] += right_[static_cast<std::size_t>(i)];
        }
        if (fading_ != nullptr && fadeLeft_ > 0) {
            fading_->player.process(forEarlier, left_.data(), right != nullptr ? right_.data() : nullptr, frames);
            for (int i = 0; i < frames && fadeLeft_ > 0; ++i, --fadeLeft_) {
                // 3x² − 2x³: level and slope are whole at both ends.
                const double share = static_cast<double>(fadeLeft_) / fadeFrames_;
                const double gain = share * share * (3.0 - 2.0 * share);
                left[i] += gain * left_[static_cast<std::size_t>(i)];
                if (right != nullptr)
                    right[i] += gain * right_[static_cast<std::size_t>(i)];
            }
        }
        returnSpent();
    }

    /// At rest, as if nothing had been played; the newest player stays.
    void reset() noexcept {
        forEach([](Prepared& prepared) { prepared.player.reset(); });
        fadeLeft_ = 0;
        pedals_.fill(0.0);
        pedalsToTell_ = false;
        returnSpent();
    }

    /// Frees everything; not while the audio thread may call.
    void clear() {
        for (Prepared** place : {&current_, &yielding_, &ringing_, &fading_}) {
            delete *place;
            *place = nullptr;
        }
        fadeLeft_ = 0;
        pedals_.fill(0.0);
        pedalsToTell_ = false;
    }

private:
    void returnSpent() noexcept {
        if (yielding_ != nullptr && !current_->player.takingOver() && handover_.giveBack(yielding_))
            yielding_ = nullptr;
        if (ringing_ != nullptr && ringing_->player.silent() && handover_.giveBack(ringing_))
            ringing_ = nullptr;
        if (fading_ != nullptr && (fadeLeft_ == 0 || fading_->player.silent()) && handover_.giveBack(fading_)) {
            fading_ = nullptr;
            fadeLeft_ = 0;
        }
    }

    Handover<Prepared>& handover_;
    Prepared* current_ = nullptr;
    Prepared* yielding_ = nullptr; ///< whose strings the current one is taking over
    Prepared* ringing_ = nullptr;
    Prepared* fading_ = nullptr;
    int fadeFrames_ = 1;
    int fadeLeft_ = 0;
    std::array<double, 16> pedals_{};
    bool pedalsToTell_ = false;
    std::array<playing::Event, mostEvents + 16> newest_{};
    std::array<playing::Event, mostEvents> earlier_{};
    std::array<double, mostFrames> left_{};
    std::array<double, mostFrames> right_{};
};

} // namespace hitchpin::plugin
