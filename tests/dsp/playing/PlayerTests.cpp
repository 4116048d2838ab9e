// Notes to courses, as a player's hand would share them out.
#include "dsp/playing/Player.h"
#include "tests/support/PlainInstruments.h"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <cstring>

using namespace hitchpin;
using playing::Event;
using playing::Player;
using playing::Rules;
using Kind = playing::Event::Kind;
using support::RealString;

namespace {

constexpr double rate = 48000.0;

/// Three fretted courses without dampers: E3, A3, E4, five frets each but the last, which has twelve.
std::shared_ptr<const design::InstrumentDesign> fretted() {
    static const auto design = support::realInstrument({RealString{"music wire", 0.65, 0.7e-3, 164.8, 52, 1, 0, 5},
                                                        RealString{"music wire", 0.65, 0.5e-3, 220.0, 57, 1, 0, 5},
                                                        RealString{"music wire", 0.65, 0.33e-3, 329.6, 64, 1, 0, 12}});
    return design;
}

/// Two choirs of C4 and one C5, dampers on C4 alone, on a yielding bridge.
std::shared_ptr<const design::InstrumentDesign> damped() {
    static const auto design =
        support::realInstrument({RealString{"music wire", 0.62, 1.0e-3, 261.6, 60, 1, 0, 0, true},
                                 RealString{"music wire", 0.62, 1.0e-3, 261.7, 60, 1, 0, 0, true},
                                 RealString{"music wire", 0.33, 0.9e-3, 523.2, 72, 1, 0, 0, false}},
                                support::plainBoard(board::BridgeKind::resistance, 1, 2000.0));
    return design;
}

void play(Player& player, std::vector<Event> events, double seconds = 0.05) {
    std::vector<double> sound(static_cast<std::size_t>(seconds * rate));
    player.process(events, sound.data(), nullptr, static_cast<int>(sound.size()));
}

double level(Player& player, double seconds = 0.05) {
    std::vector<double> sound(static_cast<std::size_t>(seconds * rate));
    player.process({}, sound.data(), nullptr, static_cast<int>(sound.size()));
    return std::abs(*std::max_element(sound.begin(), sound.end(),
                                      [](double a, double b) { return std::abs(a) < std::abs(b); }));
}

double on(const Player& player, int string) { return player.engine().energy(string); }

Event noteOn(int key, double velocity = 64.0, int channel = 1) { return {0, Kind::noteOn, channel, key, velocity}; }
Event noteOff(int key, int channel = 1) { return {0, Kind::noteOff, channel, key, 0.0}; }
Event pedal(double value) { return {0, Kind::sustain, 1, 0, value}; }

} // namespace

TEST_CASE("A key takes the highest free course at or below it within its frets", "[playing]") {
    Player player(fretted(), {});
    play(player, {noteOn(57)});
    CHECK(on(player, 1) > 0.0);
    CHECK(on(player, 0) == 0.0);
    play(player, {noteOn(66)});
    CHECK(on(player, 2) > 0.0);
}

TEST_CASE("Notes together take different courses", "[playing]") {
    Player player(fretted(), {});
    // A3 open is the first choice of both; the second goes to the fifth fret of E3.
    play(player, {noteOn(57, 64.0, 1), noteOn(57, 64.0, 2)});
    CHECK(on(player, 1) > 0.0);
    CHECK(on(player, 0) > 0.0);
    CHECK(on(player, 2) == 0.0);
}

TEST_CASE("A repeated note takes its own course again", "[playing]") {
    Player player(fretted(), {});
    play(player, {noteOn(57)});
    play(player, {noteOn(57)});
    CHECK(on(player, 0) == 0.0);
    play(player, {noteOff(57), noteOn(57)});
    CHECK(on(player, 0) == 0.0);
}

TEST_CASE("Where every course is held the first taken gives way", "[playing]") {
    Player player(fretted(), {});
    play(player, {noteOn(57, 64.0, 1), noteOn(57, 64.0, 2)});
    play(player, {noteOn(57, 64.0, 3)}); // takes A3 from channel 1
    play(player, {noteOff(57, 1)});      // which therefore ends nothing
    play(player, {noteOff(57, 2)}, 0.5); // the fretted E3 is put out by the finger
    CHECK(on(player, 0) < 1e-6 * on(player, 1));
}

TEST_CASE("Keys out of reach are silent and shown so", "[playing]") {
    Player player(fretted(), {});
    using playing::KeyState;
    CHECK(player.keyState(51) == KeyState::silent);
    CHECK(player.keyState(52) == KeyState::open);
    CHECK(player.keyState(53) == KeyState::stopped);
    CHECK(player.keyState(57) == KeyState::open);
    CHECK(player.keyState(63) == KeyState::silent);
    CHECK(player.keyState(76) == KeyState::stopped);
    CHECK(player.keyState(77) == KeyState::silent);
    play(player, {noteOn(63), noteOn(20), noteOn(127), noteOn(-5), noteOn(100000)});
    CHECK(player.silent());
}

TEST_CASE("A fretted note ends with its key, an open one without a damper rings on", "[playing]") {
    Player player(fretted(), {});
    play(player, {noteOn(53), noteOn(57)});
    play(player, {noteOff(53), noteOff(57)}, 0.4);
    CHECK(on(player, 0) < 1e-6 * on(player, 1));
    CHECK(on(player, 1) > 0.0);
}

// Turned red by: a damper that does not fall, or that stays down on the next note.
TEST_CASE("Dampers fall with the key and lift with the next note", "[playing]") {
    Player player(damped(), {});
    play(player, {noteOn(60)});
    const double loud = on(player, 0);
    // T60 0.24 s at C4: 120 dB in half a second; C5, which has no damper, is left ringing along.
    play(player, {noteOff(60)}, 0.5);
    CHECK(on(player, 0) < 1e-6 * loud);
    play(player, {noteOn(60)}, 0.5);
    CHECK(on(player, 0) > 0.1 * loud);
}

TEST_CASE("The pedal holds notes and lifts every damper", "[playing]") {
    Player player(damped(), {});
    play(player, {noteOn(60)});
    CHECK(on(player, 1) == 0.0); // under its damper the other choir swallows what the bridge gives it
    play(player, {pedal(127.0), noteOff(60)}, 0.5);
    CHECK(on(player, 1) > 0.0);
    const double held = on(player, 0);
    play(player, {pedal(0.0)}, 0.5); // C5 goes on moving the bridge under it
    CHECK(on(player, 0) < 1e-4 * held);
}

TEST_CASE("A key held when the pedal rises goes on sounding", "[playing]") {
    Player player(damped(), {});
    play(player, {pedal(127.0), noteOn(60)});
    const double loud = level(player);
    play(player, {pedal(20.0)}, 0.3);
    CHECK(level(player) > 0.1 * loud);
}

TEST_CASE("An undamped octave answers through the bridge", "[playing]") {
    Player player(damped(), {});
    play(player, {noteOn(60)}, 0.5);
    CHECK(on(player, 2) > 0.0);
}

TEST_CASE("All notes off releases its channel, all sound off ends everything", "[playing]") {
    Player player(damped(), {});
    play(player, {noteOn(60, 64.0, 1), noteOn(60, 64.0, 2)});
    play(player, {{0, Kind::allNotesOff, 1, 0, 0.0}}, 0.5);
    CHECK(on(player, 0) < 1e-3 * on(player, 1)); // which goes on moving the bridge under it
    play(player, {{0, Kind::allSoundOff, 1, 0, 0.0}}, 0.1);
    CHECK(player.silent());
    // And playing goes on.
    play(player, {noteOn(60)});
    CHECK(level(player) > 0.1);
}

TEST_CASE("A channel plays its own course where players do so", "[playing]") {
    Rules rules;
    rules.channelPerCourse = true;
    Player player(fretted(), rules);
    play(player, {noteOn(57, 64.0, 1)});
    CHECK(on(player, 0) > 0.0);
    CHECK(on(player, 1) == 0.0);
    play(player, {noteOn(57, 64.0, 2)});
    CHECK(on(player, 1) > 0.0);
    play(player, {noteOn(57, 64.0, 3), noteOn(57, 64.0, 9), noteOn(57, 64.0, 16)});
    CHECK(on(player, 2) == 0.0);
}

// Energy goes with the square of the force.
TEST_CASE("Velocity drives the force by the curve of the rules", "[playing]") {
    const auto energy = [](Rules rules, double velocity, playing::Hand hand = {}) {
        Player player(fretted(), std::move(rules));
        player.setHand(hand);
        play(player, {noteOn(57, velocity)});
        return on(player, 1);
    };
    const double one = energy({}, 64.0);
    CHECK(energy({}, 32.0) == Approx(one / 4.0));
    Rules curve;
    curve.velocity = {{1.0, 0.1}, {64.0, 1.0}, {127.0, 3.0}};
    CHECK(energy(curve, 64.0) == Approx(one));
    CHECK(energy(curve, 127.0) == Approx(9.0 * one));
    CHECK(energy(curve, 95.5) == Approx(4.0 * one));
    CHECK(energy(curve, 1.0) == Approx(0.01 * one));
    CHECK(energy({}, 64.0, {0.0, 1.0, 0.0, 2.0, 1.0}) == Approx(4.0 * one));
}

TEST_CASE("Events without meaning are ignored", "[playing]") {
    Player player(fretted(), {});
    play(player, {{0, Kind::noteOn, 0, 57, 64.0},
                  {0, Kind::noteOn, 17, 57, 64.0},
                  {0, Kind::noteOn, 1, 57, std::nan("")},
                  {0, Kind::noteOn, 1, 57, 0.0},
                  {0, Kind::sustain, 99, 0, 127.0},
                  {0, Kind::noteOff, 1, 1000, 0.0}});
    CHECK(player.silent());
}

TEST_CASE("The quietest strings are put out first", "[playing]") {
    Player player(fretted(), {});
    play(player, {noteOn(52, 10.0), noteOn(57, 100.0), noteOn(64, 60.0)});
    CHECK(player.putOutQuietest(2) == 2);
    play(player, {}, 0.1);
    CHECK(on(player, 0) == 0.0);
    CHECK(on(player, 2) == 0.0);
    CHECK(on(player, 1) > 0.0);
    CHECK(player.putOutQuietest(5) == 1);
}

TEST_CASE("Events in the middle of a block fall on their frame whatever the block", "[playing]") {
    const auto sound = [](int block) {
        Player player(fretted(), {});
        std::vector<double> out(9600);
        const Event events[] = {{100, Kind::noteOn, 1, 57, 64.0},  {1111, Kind::noteOn, 1, 53, 90.0},
                                {3333, Kind::noteOff, 1, 53, 0.0}, {3333, Kind::noteOn, 1, 66, 30.0},
                                {7001, Kind::allSoundOff, 1, 0, 0.0}};
        for (int done = 0; done < 9600; done += block) {
            std::vector<Event> now;
            for (Event event : events)
                if (event.frame >= done && event.frame < done + block) {
                    event.frame -= done;
                    now.push_back(event);
                }
            player.process(now, out.data() + done, nullptr, std::min(block, 9600 - done));
        }
        return out;
    };
    const auto whole = sound(9600);
    CHECK(std::all_of(whole.begin(), whole.begin() + 100, [](double x) { return x == 0.0; }));
    CHECK(whole[101] != 0.0);
    for (const int block : {1, 7, 64, 480}) {
        const auto cut = sound(block);
        CHECK(std::memcmp(cut.data(), whole.data(), whole.size() * sizeof(double)) == 0);
    }
}
