// The exchange between designer and audio thread. Without JUCE, so that it also runs under the thread sanitizer.
#include "Source/plugin/PlayerRelay.h"

#include <catch2/catch.hpp>

#include <atomic>
#include <chrono>
#include <cmath>
#include <iostream>
#include <memory>
#include <numbers>
#include <thread>
#include <vector>

namespace {

using hitchpin::playing::Event;

/// Sounds a level of its own until told otherwise, and counts itself: what must be freed is seen to be.
struct SteadyPlayer {
    double level = 1.0;
    double remaining = 1e9; ///< frames until silent
    std::vector<Event> heard = {};
    bool remembers = true;
    bool takesOver = false; ///< the strings of any player before
    int yielding = 0;       ///< frames for which the one before is still needed

    void process(std::span<const Event> events, double* left, double* right, int frames) {
        if (remembers)
            heard.insert(heard.end(), events.begin(), events.end());
        for (int i = 0; i < frames; ++i, remaining -= 1.0) {
            left[i] = remaining > 0.0 ? level : 0.0;
            if (right != nullptr)
                right[i] = left[i];
        }
        yielding = std::max(0, yielding - frames);
    }
    /// As two players of the same strings would: sound goes on at the other's level for so many frames.
    bool takeOver(SteadyPlayer& before) {
        if (!takesOver)
            return false;
        yielding = 1000;
        remaining = before.remaining;
        return true;
    }
    bool takingOver() const { return yielding > 0; }
    void reset() { remaining = 0.0; }
    bool silent() const { return remaining <= 0.0; }
};

struct Prepared {
    explicit Prepared(int n, double level = 1.0) : number(n), canary(~n) {
        player.level = level;
        alive.fetch_add(1);
    }
    ~Prepared() {
        canary = 0;
        alive.fetch_sub(1);
    }
    Prepared(const Prepared&) = delete;
    int number;
    int canary; ///< the complement of number while alive
    SteadyPlayer player;
    static inline std::atomic<int> alive{0};
};

using Handover = hitchpin::plugin::Handover<Prepared>;
using Relay = hitchpin::plugin::PlayerRelay<Prepared>;
const auto any = [](const Prepared&) { return true; };

std::vector<double> run(Relay& relay, int frames, std::span<const Event> events = {}) {
    std::vector<double> left(static_cast<std::size_t>(frames)), right(left.size());
    relay.process(events, left.data(), right.data(), frames);
    return left;
}

} // namespace

TEST_CASE("of several offers untaken the latest wins and the others are freed") {
    {
        Handover handover;
        for (int i = 0; i < 5; ++i)
            handover.offer(std::make_unique<Prepared>(i));
        CHECK(Prepared::alive == 1);
        Prepared* taken = handover.take();
        REQUIRE(taken != nullptr);
        CHECK(taken->number == 4);
        CHECK(handover.take() == nullptr);
        REQUIRE(handover.giveBack(taken));
        CHECK(Prepared::alive == 1); // giving back frees nothing
        CHECK(handover.collect() == 1);
        CHECK(Prepared::alive == 0);
    }
    CHECK(Prepared::alive == 0);
}

TEST_CASE("where nothing is collected the audio thread takes no more and nothing is lost") {
    {
        Handover handover;
        Relay relay(handover);
        relay.setFadeFrames(4);
        int taken = 0;
        for (int i = 0; i < 50; ++i) {
            handover.offer(std::make_unique<Prepared>(i));
            taken += relay.takeNext(any) ? 1 : 0;
            run(relay, 8);
        }
        // Three at work, four places for what is spent, one waiting.
        CHECK(taken == 7);
        CHECK(Prepared::alive == 8);
        CHECK(handover.collect() == 4);
        CHECK(relay.takeNext(any));
        CHECK(relay.current()->number == 49);
    }
    CHECK(Prepared::alive == 0);
}

TEST_CASE("the player before rings on and hears releases and pedals but no new notes") {
    Handover handover;
    Relay relay(handover);
    relay.setFadeFrames(100);
    auto first = std::make_unique<Prepared>(1, 1.0), second = std::make_unique<Prepared>(2, 10.0);
    SteadyPlayer &earlier = first->player, &newest = second->player;
    handover.offer(std::move(first));
    REQUIRE(relay.takeNext(any));
    const Event pedalDown{0, Event::Kind::sustain, 3, 0, 127.0};
    CHECK(run(relay, 16, {&pedalDown, 1}).back() == 1.0);

    handover.offer(std::move(second));
    REQUIRE(relay.takeNext(any));
    const std::array<Event, 3> events{{{2, Event::Kind::noteOn, 1, 60, 64.0},
                                       {5, Event::Kind::noteOff, 1, 60, 0.0},
                                       {9, Event::Kind::allSoundOff, 1, 0, 0.0}}};
    const auto sound = run(relay, 16, events);
    CHECK(sound.front() == 11.0); // both in full
    CHECK(sound.back() == 11.0);
    REQUIRE(earlier.heard.size() == 3);
    CHECK(earlier.heard[1].kind == Event::Kind::noteOff);
    CHECK(earlier.heard[2].kind == Event::Kind::allSoundOff);
    REQUIRE(newest.heard.size() == 4);
    CHECK(newest.heard[0].kind == Event::Kind::sustain); // the pedal that was down before it came
    CHECK(newest.heard[0].channel == 3);
    CHECK(newest.heard[1].kind == Event::Kind::noteOn);
    CHECK(newest.heard[1].frame == 2);
}

// Turned red by: a player before that is still processed, or freed while its strings are being taken over.
TEST_CASE("a player of the same strings takes them over and keeps the one before until that is done") {
    REQUIRE(Prepared::alive == 0);
    {
        Handover handover;
        Relay relay(handover);
        handover.offer(std::make_unique<Prepared>(1, 1.0));
        REQUIRE(relay.takeNext(any));
        CHECK(run(relay, 100).back() == 1.0);
        auto second = std::make_unique<Prepared>(2, 0.5);
        second->player.takesOver = true;
        handover.offer(std::move(second));
        REQUIRE(relay.takeNext(any));
        CHECK(run(relay, 500).front() == 0.5); // not both
        handover.offer(std::make_unique<Prepared>(3, 0.25));
        CHECK_FALSE(relay.takeNext(any)); // no room yet
        handover.collect();
        CHECK(Prepared::alive == 3);
        run(relay, 500);
        handover.collect();
        CHECK(Prepared::alive == 2); // the first is gone
        CHECK(relay.takeNext(any));
    }
    CHECK(Prepared::alive == 0);
}

TEST_CASE("a third player fades the first without a step") {
    Handover handover;
    Relay relay(handover);
    constexpr int fade = 1440; // 30 ms at 48 kHz
    relay.setFadeFrames(fade);
    for (int i = 0; i < 3; ++i)
        handover.offer(std::make_unique<Prepared>(i, i == 0 ? 1.0 : 0.0)), relay.takeNext(any);
    std::vector<double> sound;
    for (int block = 0; block < 30; ++block)
        for (double x : run(relay, 64))
            sound.push_back(x);
    double worstStep = std::abs(sound.front() - 1.0);
    for (std::size_t i = 1; i < sound.size(); ++i)
        worstStep = std::max(worstStep, std::abs(sound[i] - sound[i - 1]));
    // The steepest slope of 3x² − 2x³ is 1.5 in x = 1/fade: closed form.
    const double steepest = 1.5 / fade;
    std::cout << "fade: largest step " << worstStep << ", closed form " << steepest << "\n";
    CHECK(worstStep <= steepest * 1.0001);
    CHECK(sound[fade - 1] > 0.0);
    CHECK(sound[fade] == 0.0);
    CHECK(relay.hasRoom());
}

TEST_CASE("what is refused goes back unheard") {
    Handover handover;
    Relay relay(handover);
    handover.offer(std::make_unique<Prepared>(1));
    CHECK_FALSE(relay.takeNext([](const Prepared&) { return false; }));
    CHECK(relay.current() == nullptr);
    CHECK(relay.hasRoom());
    CHECK(run(relay, 8).back() == 0.0);
    CHECK(handover.collect() == 1);
}

TEST_CASE("designer and audio thread exchange thousands of players without a race or a leak") {
    constexpr int offers = 20000;
    int takenCount = 0, wrong = 0, backwards = 0;
    {
        Handover handover;
        Relay relay(handover);
        relay.setFadeFrames(3);
        std::atomic<bool> done{false};
        std::thread designer([&] {
            for (int i = 1; i <= offers; ++i) {
                auto made = std::make_unique<Prepared>(i);
                made->player.remembers = false;
                made->player.remaining = 40.0;
                handover.offer(std::move(made));
                handover.collect();
                if (i % 4 == 0)
                    std::this_thread::yield();
            }
            done = true;
        });
        int latest = 0;
        std::vector<double> left(16), right(16);
        const auto step = [&] {
            if (relay.takeNext(any)) {
                ++takenCount;
                backwards += relay.current()->number <= latest ? 1 : 0;
                latest = relay.current()->number;
            }
            relay.forEach([&](Prepared& p) { wrong += p.canary == ~p.number ? 0 : 1; });
            relay.process({}, left.data(), right.data(), 16);
        };
        while (!done)
            step();
        designer.join();
        handover.collect();
        step(), step();
        handover.collect();
        step();
        CHECK(latest == offers); // the last one offered is the one that plays in the end
    }
    std::cout << "exchange: " << takenCount << " of " << offers << " offered players taken\n";
    CHECK(wrong == 0);
    CHECK(backwards == 0);
    CHECK(takenCount > 0);
    CHECK(Prepared::alive == 0);
}
