// What decays ends: in nothing at all, and on its way never in numbers that a processor is slow with.
#include "dsp/engine/Engine.h"
#include "tests/support/PlainInstruments.h"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <numbers>

using namespace hitchpin;
using engine::Engine;
using support::RealString;

// Turned red by: a rest that is never taken, states that are not flushed, modes that ring for ever.
TEST_CASE("Sixty seconds of decay end in true silence", "[engine]") {
    constexpr int rate = 48000, seconds = 60;
    const board::Board board{board::BridgeKind::soundboard, {{150.0, 0.0}, {150.0, 1.0}},
                             {{110.0, 30.0, 0.4, 1.3, {1.0, 0.6}, 0.0}, {600.0, 60.0, 0.2, 1.5, {0.5, -1.0}, 0.0}}};
    // On this board all are 214 dB down (Engine.cpp's rest) well within the minute; a thick wire in unison would not be.
    Engine engine(support::realInstrument({RealString{"nylon", 0.65, 1.0e-3, 110.0, 45, 2, 3.0},
                                           RealString{"music wire", 0.4, 0.3e-3, 329.6, 64},
                                           RealString{"music wire", 0.052, 0.79e-3, 4186.0, 108}},
                                          board));
    for (int s = 0; s < 4; ++s)
        engine.pluck(s, {20.0, 0.2, 0.002, std::numbers::pi / 2.0});
    std::vector<double> left(rate), right(rate);
    int slow = 0, silentFrom = seconds;
    for (int second = 0; second < seconds; ++second) {
        engine.process(left.data(), right.data(), rate);
        for (const auto* side : {&left, &right})
            slow += static_cast<int>(std::count_if(side->begin(), side->end(),
                                                   [](double x) { return std::fpclassify(x) == FP_SUBNORMAL; }));
        if (engine.silent())
            silentFrom = std::min(silentFrom, second);
    }
    CHECK(slow == 0);
    CHECK(engine.silent());
    CHECK(engine.energy() == 0.0);
    CHECK(silentFrom < seconds - 1);
    for (const auto* side : {&left, &right})
        CHECK(std::all_of(side->begin(), side->end(), [](double x) { return x == 0.0; }));
}
