// What a bridge that yields does to the strings on it.
#include "dsp/analysis/Measure.h"
#include "dsp/engine/Engine.h"
#include "tests/support/PlainInstruments.h"
#include "tests/support/Worse.h"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <complex>
#include <iostream>
#include <numbers>

using namespace hitchpin;
using engine::Engine;

namespace {

std::vector<double> render(Engine& engine, double seconds) {
    std::vector<double> sound(static_cast<std::size_t>(seconds * support::idealRate));
    engine.process(sound.data(), nullptr, static_cast<int>(sound.size()));
    return sound;
}

} // namespace

// One yielding end of real admittance G: amplitude τ = 1/(2·Z0·G·f1) for every n, to first order in Z0·G; exactly a
// round trip keeps (1 − Z0·G)/(1 + Z0·G). Example C4: Z0 = 2.0608 kg/s, G = 1e-3 s/kg → τ = 0.92604 s,
// T60 = 6.3969 s at 262 Hz (computed in 40-digit arithmetic from the formula).
// Turned red by: energy's time constant taken for the amplitude's (a factor of 2).
TEST_CASE("One yielding end gives the closed form decay", "[engine]") {
    const double impedance = 2.0608, admittance = 1e-3, frequency = 262.0;
    const int period = static_cast<int>(support::idealRate / frequency);
    const double f1 = support::idealRate / period;
    Engine engine(support::idealInstrument({{period, impedance}}, {board::BridgeKind::resistance, {{1.0 / admittance}}}));
    engine.pluck(0, {1.0, 0.23, 0.0, std::numbers::pi / 2.0});
    const auto sound = render(engine, 3.0);
    std::vector<double> expected;
    for (int n = 1; n <= 5; ++n)
        expected.push_back(n * f1);
    const std::vector<double> later(sound.begin() + 6 * period, sound.end());
    const auto measured = analysis::measurePartials(later, support::idealRate, expected);
    const double x = impedance * admittance;
    const double exact = f1 * std::log((1.0 + x) / (1.0 - x)); // 1/s
    const double t60 = std::log(1000.0) / (2.0 * impedance * admittance * frequency);
    CHECK(t60 == Approx(6.3969).epsilon(1e-5));
    double worst = 0.0;
    for (const auto& partial : measured)
        worst = support::worse(worst, std::abs(partial.decayRate / exact - 1.0));
    std::cout << "decay by a yielding end: worst " << 100.0 * worst << " % of the exact rate (allowed 0.1)\n";
    CHECK(worst < 1e-3); // the meter's own tolerance on clean sound
    // The textbook's first order is as good as x² / 3.
    CHECK(exact == Approx(2.0 * impedance * admittance * f1).epsilon(x));
}

// Weinreich, JASA 62:1474 (1977): two equal strings on a resistance. The exact roots come from the junction itself:
// with s_i = e^(−p·T_i) the strings' round trips, (R + Z1 + Z2) = 2·Σ Z_i/(1 + s_i) has the motion's poles p.
// In phase they decay at twice the rate of one alone; in antiphase they move no bridge.
TEST_CASE("Two unisons on a resistance ring twice, fast and slow", "[engine]") {
    const double impedance = 2.0, resistance = 400.0;
    const int period = 184;
    const double f1 = support::idealRate / period, x = impedance / resistance;
    const auto instrument = support::idealInstrument({{period, impedance}, {period, impedance}},
                                                     {board::BridgeKind::resistance, {{resistance}}});
    const auto measure = [&](double second) {
        Engine engine(instrument);
        engine.pluck(0, {1.0, 0.31, 0.0, std::numbers::pi / 2.0});
        engine.pluck(1, {second, 0.31, 0.0, std::numbers::pi / 2.0});
        return render(engine, 4.0);
    };
    const std::vector<double> expected{f1};
    const auto together = measure(1.0);
    const auto fast = analysis::measurePartials(std::vector<double>(together.begin() + 6 * period, together.end()),
                                                support::idealRate, expected);
    // Both strings as one of twice the impedance.
    const double exact = f1 * std::log((1.0 + 2.0 * x) / (1.0 - 2.0 * x));
    CHECK(fast[0].decayRate == Approx(exact).epsilon(1e-3));
    // Alone each would decay at half of that.
    CHECK(exact == Approx(2.0 * 2.0 * x * f1).epsilon(1e-3));

    // Against each other the bridge stays still: nothing is heard and nothing is lost.
    Engine against(instrument);
    against.pluck(0, {1.0, 0.31, 0.0, std::numbers::pi / 2.0});
    against.pluck(1, {-1.0, 0.31, 0.0, std::numbers::pi / 2.0});
    render(against, 0.5);
    const double early = against.energy();
    const auto silent = render(against, 2.0);
    // The sum of the two forces on the bridge, R·v, is nought but for rounding.
    CHECK(std::all_of(silent.begin(), silent.end(), [](double force) { return std::abs(force) < 1e-9; }));
    CHECK(against.energy() == Approx(early).epsilon(1e-9));

    // One plucked alone: half the energy goes fast, half stays.
    Engine alone(instrument);
    alone.pluck(0, {1.0, 0.31, 0.0, std::numbers::pi / 2.0});
    render(alone, 6.0 * period / support::idealRate); // a release takes four
    const double started = alone.energy();
    render(alone, 3.0);
    // Six periods into the fast half: (1 + e^(−2·6·rate/f1))/2 of the whole was there at the start.
    const double atStart = 0.5 * (1.0 + std::exp(-12.0 * exact / f1));
    CHECK(alone.energy() / started == Approx(0.5 / atStart).epsilon(0.003));
    CHECK(alone.energy(0) == Approx(alone.energy(1)).epsilon(1e-6));
}

// A string at rest sends out the bridge's velocity v: until that comes back it holds Z·Σv²/fs, and the bridge is heard
// as R·v (power into a semi-infinite string, Z·v²; common practice).
// Turned red by: strings that wake only some time after the bridge began to move.
TEST_CASE("A string at rest follows its bridge from the first sample on", "[engine]") {
    const double resistance = 300.0, impedance = 1.5;
    Engine engine(support::idealInstrument({{400, 1.0}, {200, impedance}}, {board::BridgeKind::resistance, {{resistance}}}));
    engine.pluck(0, {1.0, 0.2, 0.0, std::numbers::pi / 2.0});
    double taken = 0.0;
    for (const double force : render(engine, 190.0 / support::idealRate))
        taken += impedance * std::pow(force / resistance, 2) / support::idealRate;
    CHECK(taken > 0.0);
    CHECK(engine.energy(1) == Approx(taken).epsilon(1e-9));
}

TEST_CASE("A string far away on the same bridge answers at its own octave", "[engine]") {
    const double resistance = 300.0;
    const int period = 400;
    // The second string is an octave higher: its first partial is the first's second.
    const auto instrument = support::idealInstrument({{period, 1.0}, {period / 2, 1.0}, {311, 1.0}},
                                                     {board::BridgeKind::resistance, {{resistance}}});
    Engine engine(instrument);
    engine.pluck(0, {1.0, 0.2, 0.0, std::numbers::pi / 2.0});
    render(engine, 1.0);
    CHECK(engine.energy(1) > 100.0 * engine.energy(2));
}
