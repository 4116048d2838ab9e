// The sound does not depend on how time is cut, on what was played before a reset, or on anything but the plucks.
#include "dsp/playing/Player.h"
#include "tests/support/PlainInstruments.h"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <cstring>
#include <functional>
#include <iostream>

using namespace hitchpin;
using engine::Engine;
using support::RealString;

namespace {

constexpr int total = 48000;

std::shared_ptr<const design::InstrumentDesign> coupled() {
    // A bridge with two points and one with a single, on one board.
    auto board = support::plainBoard(board::BridgeKind::soundboard, 2, 300.0,
                                     {{197.0, 30.0, 0.3, 1.2, {1.0, 0.7, 0.5}, -0.3},
                                      {410.0, 35.0, 0.2, 1.5, {0.8, -1.0, -0.6}, 0.4}});
    const auto second = board::addBridge("second", 0, board, 1, 250.0);
    auto description = support::realDescription(
        {RealString{"music wire", 0.62, 1.0e-3, 261.6, 60, 3, 0.7, 0, true},
         RealString{"music wire", 0.648, 0.33e-3, 329.6, 64, 1, 0.0, 7, false, {}, 0, 0.3},
         RealString{"nylon", 0.65, 0.9e-3, 196.0, 55, 1, 0.0, 0, false, {}, 1, 0.9},
         RealString{"music wire", 0.052, 0.79e-3, 4186.0, 108, 1, 0.0, 0, true, {}, 0, 0.05}},
        board);
    description.bridges = {{"first", 0, 0, 2}, second};
    static const auto design = support::designed(description);
    return design;
}

struct Act {
    int frame;
    std::function<void(Engine&)> what;
};

/// Everything a player can do, at times that are no multiples of anything.
std::vector<Act> performance() {
    return {{0, [](Engine& e) { e.pluck(0, {2.0, 0.2, 0.003, 0.8}); }},
            {333, [](Engine& e) { e.pluck(3, {1.0, 0.13, 0.001, 1.2}); }},
            {1001, [](Engine& e) { e.listen({0.9, 0.6}); }},
            {5003, [](Engine& e) { e.pluck(5, {3.0, 0.3, 0.0, 1.5}); }},
            {7777, [](Engine& e) { e.stopAt(3, 5); }},
            {7778, [](Engine& e) { e.pluck(3, {1.5, 0.2, 0.002, 0.7}); }},
            {12345, [](Engine& e) { e.damp(0, 0.2); e.damp(1, 0.2); }},
            {20011, [](Engine& e) { e.silence(3); }},
            {20040, [](Engine& e) { e.pluck(3, {1.0, 0.4, 0.0, 1.0}); }},
            {23456, [](Engine& e) { e.damp(0, 0.0); e.pluck(4, {0.5, 0.5, 0.004, 0.1}); }},
            {31111, [](Engine& e) { e.silence(); }},
            {40000, [](Engine& e) { e.pluck(2, {2.0, 0.15, 0.003, 1.3}); }}};
}

struct Stereo {
    std::vector<double> left = std::vector<double>(total), right = std::vector<double>(total);
    bool operator==(const Stereo& other) const {
        return std::memcmp(left.data(), other.left.data(), total * sizeof(double)) == 0 &&
               std::memcmp(right.data(), other.right.data(), total * sizeof(double)) == 0;
    }
};

Stereo play(Engine& engine, int block) {
    Stereo sound;
    const auto acts = performance();
    std::size_t next = 0;
    for (int done = 0; done < total;) {
        while (next < acts.size() && acts[next].frame == done)
            acts[next++].what(engine);
        int count = std::min(block, total - done);
        if (next < acts.size())
            count = std::min(count, acts[next].frame - done);
        engine.process(sound.left.data() + done, sound.right.data() + done, count);
        done += count;
    }
    return sound;
}

} // namespace

// Turned red by: a rest decided on the host's block, or a reduction whose order depends on the block.
TEST_CASE("Blocks of any size give bit identical sound", "[engine]") {
    Engine whole(coupled());
    const Stereo expected = play(whole, total);
    CHECK(std::any_of(expected.left.begin(), expected.left.end(), [](double x) { return std::abs(x) > 0.1; }));
    CHECK(std::all_of(expected.left.begin(), expected.left.end(), [](double x) { return std::isfinite(x); }));
    for (const int block : {1, 7, 64, 480, 4096}) {
        Engine engine(coupled());
        CAPTURE(block);
        CHECK(play(engine, block) == expected);
    }
}

// Turned red by: a listener who starts to move again each time it is told where it already is.
TEST_CASE("Saying again where one listens changes nothing", "[engine]") {
    Engine once(coupled()), often(coupled());
    std::vector<double> a(9600), b(9600);
    for (Engine* engine : {&once, &often}) {
        engine->pluck(0, {2.0, 0.2, 0.003, 0.8});
        engine->process(a.data(), nullptr, 960);
        engine->listen({0.9, 0.6}); // a move that takes longer than the blocks below
    }
    once.process(a.data(), nullptr, 9600);
    for (int done = 0; done < 9600; done += 96) {
        often.listen({0.9, 0.6});
        often.process(b.data() + done, nullptr, 96);
    }
    CHECK(std::memcmp(a.data(), b.data(), a.size() * sizeof(double)) == 0);
}

// Turned red by: any state that reset forgets.
TEST_CASE("Reset equals fresh to the last bit", "[engine]") {
    Engine fresh(coupled());
    const Stereo expected = play(fresh, 480);
    Engine used(coupled());
    play(used, 64);
    used.pluck(1, {5.0, 0.3, 0.0, 1.0});
    std::vector<double> some(777);
    used.process(some.data(), nullptr, 777);
    used.reset();
    used.listen({}); // a listener stays where it is over a reset
    used.reset();
    CHECK(used.silent());
    CHECK(play(used, 480) == expected);
}

TEST_CASE("Silence in gives silence out, and a sound ends in true silence", "[engine]") {
    Engine engine(coupled());
    std::vector<double> out(9600, 1.0);
    engine.process(out.data(), nullptr, 9600);
    CHECK(std::all_of(out.begin(), out.end(), [](double x) { return x == 0.0; }));
    CHECK(engine.silent());

    for (int string = 0; string < 6; ++string)
        engine.pluck(string, {1.0, 0.2, 0.0, 0.8});
    for (int string = 0; string < 6; ++string)
        engine.damp(string, 0.3);
    int denormals = 0;
    double seconds = 0.0;
    for (; seconds < 60.0 && !engine.silent(); seconds += 0.2) {
        engine.process(out.data(), nullptr, 9600);
        denormals += static_cast<int>(
            std::count_if(out.begin(), out.end(), [](double x) { return std::fpclassify(x) == FP_SUBNORMAL; }));
    }
    std::cout << "damped to T60 0.3 s, true silence after " << seconds << " s\n";
    CHECK(engine.silent());
    // From some 1e-4 J to 1e-22 J is 180 dB: three T60, and the time to notice. A slow state anywhere takes longer.
    CHECK(seconds <= 1.2);
    CHECK(engine.energy() == 0.0);
    CHECK(denormals == 0);
    engine.process(out.data(), nullptr, 9600);
    CHECK(std::all_of(out.begin(), out.end(), [](double x) { return x == 0.0; }));
}

TEST_CASE("Plucks that are no numbers and strings that do not exist are ignored", "[engine]") {
    Engine engine(coupled());
    const double nan = std::nan(""), infinite = INFINITY;
    engine.pluck(0, {nan, 0.2, 0.0, 1.0});
    engine.pluck(0, {1.0, infinite, 0.0, 1.0});
    engine.pluck(0, {1.0, 0.2, nan, 1.0});
    engine.pluck(0, {1.0, 0.2, 0.0, infinite});
    engine.pluck(-1, {});
    engine.pluck(99, {});
    engine.damp(99, 1.0);
    engine.damp(0, nan);
    engine.stopAt(3, 99);
    engine.stopAt(3, -1);
    engine.stopAt(-7, 0);
    engine.silence(99);
    engine.listen({nan, 0.0});
    CHECK(engine.silent());
    CHECK(engine.velocityAt(99, true, 0.5) == 0.0);
    CHECK(engine.energy(99) == 0.0);
}
