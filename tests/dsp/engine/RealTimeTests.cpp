// After construction nothing that sounds asks the heap, and nothing can throw.
#include "dsp/playing/Player.h"
#include "tests/support/AllocationGuard.h"
#include "tests/support/PlainInstruments.h"

#include <catch2/catch.hpp>

#include <array>

using namespace hitchpin;
using engine::Engine;
using playing::Player;
using support::AllocationGuard;
using support::RealString;

static_assert(noexcept(std::declval<Engine&>().process(nullptr, nullptr, 0)));
static_assert(noexcept(std::declval<Engine&>().pluck(0, {})));
static_assert(noexcept(std::declval<Engine&>().stopAt(0, 0)));
static_assert(noexcept(std::declval<Engine&>().damp(0, 0.0)));
static_assert(noexcept(std::declval<Engine&>().silence()));
static_assert(noexcept(std::declval<Engine&>().listen({})));
static_assert(noexcept(std::declval<Engine&>().reset()));
static_assert(noexcept(std::declval<Player&>().process({}, nullptr, nullptr, 0)));
static_assert(noexcept(std::declval<Player&>().setHand({})));
static_assert(noexcept(std::declval<Player&>().reset()));

// Turned red by: a vector that grows in process (tried: ports without their reserve).
TEST_CASE("Playing asks nothing of the heap", "[engine][playing]") {
    const auto design = support::realInstrument(
        {RealString{"music wire", 0.62, 1.0e-3, 261.6, 60, 3, 0.7, 0, true},
         RealString{"music wire", 0.648, 0.33e-3, 329.6, 64, 1, 0.0, 12, false},
         RealString{"nylon", 0.65, 0.9e-3, 196.0, 55, 1, 0.0, 0, false, {}, 0, 0.3}},
        support::plainBoard(board::BridgeKind::soundboard, 2, 300.0,
                            {{197.0, 30.0, 0.3, 1.2, {1.0, 0.7}, -0.3}, {410.0, 35.0, 0.2, 1.5, {0.8, -1.0}, 0.4}}));
    Player player(design, {});
    std::array<double, 512> left, right;
    using Kind = playing::Event::Kind;
    AllocationGuard guard;
    for (int round = 0; round < 200; ++round) {
        const std::array<playing::Event, 6> events{{
            {3, Kind::noteOn, 1, 55 + round % 22, 100.0},
            {40, Kind::sustain, 1, 0, round % 3 == 0 ? 127.0 : 0.0},
            {99, Kind::noteOff, 1, 54 + round % 22, 0.0},
            {230, Kind::noteOn, 2, 60, 40.0},
            {231, round % 50 == 49 ? Kind::allSoundOff : Kind::noteOff, 2, 60, 0.0},
            {400, Kind::allNotesOff, 1, 0, 0.0},
        }};
        player.setHand({0.01, 1.2, 0.1, 1.1, 0.9});
        player.listen({1.0, round % 2 == 0 ? 0.5 : 0.0});
        player.process(events, left.data(), round % 7 == 0 ? nullptr : right.data(), 512);
        player.putOutQuietest(round % 2);
    }
    player.reset();
    CHECK(guard.allocations() == 0);
    CHECK(guard.frees() == 0);
}
