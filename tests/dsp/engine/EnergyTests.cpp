// Energy on strings and boards grows by plucks alone.
#include "dsp/engine/Engine.h"
#include "tests/support/PlainInstruments.h"
#include "tests/support/Worse.h"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <cstdlib>
#include <iostream>
#include <limits>
#include <random>

using namespace hitchpin;
using engine::Engine;
using string::End;
using support::RealString;

namespace {

/// The sums of squares carry the rounding of some thousand additions; growth over that would repeat and be seen.
constexpr double allowedGrowth = 1e-12;

/// Real strings of all kinds, designed once; instruments are put together from them.
const std::vector<design::StringDesign>& pool() {
    static const std::vector<design::StringDesign> strings = [] {
        std::mt19937 random(20260101);
        std::uniform_real_distribution<double> unit(0.0, 1.0);
        std::vector<design::StringDesign> made;
        const char* materials[] = {"music wire", "yellow brass", "nylon", "gut", "phosphor bronze"};
        while (made.size() < 60) {
            RealString s;
            s.material = materials[made.size() % 5];
            s.hertz = 40.0 * std::exp2(6.0 * unit(random));
            s.lengthMetres = 0.5 * std::pow(200.0 / s.hertz, 0.8) * (0.7 + 0.6 * unit(random));
            s.diameterMetres = 0.3e-3 * std::exp2(2.0 * unit(random));
            s.frets = made.size() % 4 == 0 ? 3 : 0;
            const End ends[] = {End::hinged, End::hinged, End::clamped, End::free};
            s.ends.nut = ends[random() % 4];
            if (random() % 5 == 0)
                s.ends.bridge = End::free;
            try {
                made.push_back(support::realInstrument({s})->strings.front());
            } catch (const std::exception&) {
                continue; // no such string can be made: too thick for its length
            }
        }
        return made;
    }();
    return strings;
}

/// Up to a dozen modes anywhere, at any angle, under up to three bridges of up to four points.
board::Board randomBoard(std::mt19937& random, std::vector<board::Bridge>& bridges) {
    std::uniform_real_distribution<double> unit(0.0, 1.0);
    board::Board board{board::BridgeKind::soundboard, {}, {}};
    for (std::size_t b = 1 + random() % 3; b > 0; --b) {
        const int points = 1 + static_cast<int>(random() % 4);
        bridges.push_back(board::addBridge("", 2, board, points, std::exp2(6.0 * unit(random) + 3.0)));
    }
    for (std::size_t m = random() % 13; m > 0; --m) {
        board::Mode mode{60.0 * std::exp2(6.0 * unit(random)), 0.4 + 60.0 * unit(random), 0.02 * std::exp2(6.0 * unit(random)),
                         6.3 * unit(random), {}, 0.0};
        for (std::ptrdiff_t p = 0; p < std::ssize(board.points); ++p)
            mode.shape.push_back(2.0 * unit(random) - 1.0);
        board.modes.push_back(std::move(mode));
    }
    return board;
}

std::shared_ptr<const design::InstrumentDesign> randomInstrument(std::mt19937& random) {
    std::uniform_real_distribution<double> unit(0.0, 1.0);
    auto design = std::make_shared<design::InstrumentDesign>();
    design->sampleRate = 48000.0;
    std::vector<board::Bridge> bridges{{"", 0}, {"", 1}};
    design->boards = {{},
                      {board::BridgeKind::resistance, {{std::exp2(12.0 * unit(random) - 2.0)}}},
                      design::boardDesign(randomBoard(random, bridges), design->sampleRate)};
    const std::size_t count = 1 + random() % 12;
    for (std::size_t i = 0; i < count; ++i) {
        design->strings.push_back(pool()[random() % pool().size()]);
        design->strings.back().course = static_cast<int>(i);
        const board::Bridge& bridge = bridges[random() % bridges.size()];
        design->strings.back().board = bridge.board;
        design->strings.back().bridgePosition = unit(random);
        design->strings.back().place = board::sharing(bridge, design->strings.back().bridgePosition);
    }
    return design;
}

/// Plays it at random and returns the largest growth of energy between two looks without a pluck in between,
/// relative to the most energy there was.
double worstGrowth(std::mt19937& random, int samples, long& looks) {
    std::uniform_real_distribution<double> unit(0.0, 1.0);
    const auto design = randomInstrument(random);
    const int strings = static_cast<int>(design->strings.size());
    Engine engine(design);
    std::vector<double> out(4096);
    double worst = -1.0, most = 0.0;
    int quietUntil = 0;
    for (int done = 0; done < samples;) {
        if (done >= quietUntil) {
            const int string = static_cast<int>(random() % static_cast<unsigned>(strings));
            switch (random() % 8) {
            case 0:
                engine.damp(string, unit(random) < 0.5 ? 0.0 : unit(random));
                break;
            case 1:
                engine.stopAt(string, static_cast<int>(random() % 4));
                break;
            case 2:
                engine.silence(string);
                break;
            default:
                engine.pluck(string, {5.0 * unit(random), unit(random), 0.005 * unit(random), 6.3 * unit(random)});
                // A pluck sends for four periods, and what the side's filters then hold dies away.
                const auto& open = design->strings[static_cast<std::size_t>(string)].stops.front();
                quietUntil = done + static_cast<int>(4.0 * 48000.0 / open.loop.firstPartialHz) + 3000;
            }
        }
        const bool listens = done >= quietUntil;
        double before = engine.energy();
        const int steps = 24, step = 1 + static_cast<int>(random() % 170);
        for (int i = 0; i < steps && done < samples; ++i) {
            engine.process(out.data(), nullptr, step);
            done += step;
            if (!std::all_of(out.begin(), out.begin() + step, [](double x) { return std::isfinite(x); }))
                return std::numeric_limits<double>::infinity();
            const double after = engine.energy();
            most = std::max(most, after);
            if (listens && before > 0.0) {
                worst = support::worse(worst, (after - before) / most);
                ++looks;
            }
            before = after;
        }
    }
    return worst;
}

} // namespace

// Turned red by: a shelf with |H| over 1, a bridge that returns v − in with a wrong ΣZ, a hold over 1.
TEST_CASE("Energy never grows by itself over random instruments", "[engine][random]") {
    const bool whole = std::getenv("HITCHPIN_LONG_TESTS") != nullptr;
    const int instruments = whole ? 1000 : 100, samples = whole ? 100000 : 20000;
    double worst = -1.0;
    long looks = 0;
    for (int seed = 0; seed < instruments; ++seed) {
        std::mt19937 random(static_cast<unsigned>(seed));
        const double growth = worstGrowth(random, samples, looks);
        if (growth > allowedGrowth)
            UNSCOPED_INFO("seed " << seed << " grows by " << growth);
        worst = support::worse(worst, growth);
    }
    std::cout << instruments << " random instruments, " << samples << " samples each, " << looks
              << " looks: energy grows at most by " << worst << " of its peak (allowed " << allowedGrowth << ")\n";
    CHECK(looks > 20 * instruments);
    CHECK(worst <= allowedGrowth);
}

// The test above must be able to fail: a loop with a gain of 1.0001 is caught.
TEST_CASE("The energy check sees a loop that gains", "[engine]") {
    auto design = std::make_shared<design::InstrumentDesign>(
        *support::idealInstrument({support::IdealString{200, 0.5, {}, 1.0001}}));
    Engine engine(design);
    engine.pluck(0, {1.0, 0.3, 0.0, 1.0});
    std::vector<double> out(2000);
    engine.process(out.data(), nullptr, 2000);
    const double before = engine.energy();
    engine.process(out.data(), nullptr, 2000);
    CHECK(engine.energy() > before * (1.0 + allowedGrowth));
}
