// How true loops are: yardstick strings and random ones, at every rate and both qualities, against the goals. Judged
// by the poles of the loop as it runs, and those against the engine's own sound.
#include "dsp/analysis/Measure.h"
#include "dsp/design/MakeLoop.h"
#include "dsp/engine/Engine.h"
#include "dsp/string/Strung.h"
#include "tests/support/LoopPoles.h"
#include "tests/support/PlainInstruments.h"
#include "tests/support/YardstickStrings.h"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <numbers>
#include <random>
#include <string>
#include <utility>
#include <vector>

using namespace hitchpin;
using namespace hitchpin::design;

namespace {

// The goals.
constexpr double firstCents = 0.01;
constexpr double liveCents = 1.0;                             // partials up to the n where X(n) = K − 1.2
constexpr double referenceCents = 0.5, referenceMean = 0.1;   // worst and root mean square
constexpr double t60Share = 0.04, t60ShareOfPlainTreble = 0.01; // of partials up to t60To
constexpr double accurateTo = 10000.0, t60To = 6000.0;        // Hz
constexpr int mostPartials = 120;
constexpr double middleC = 261.63; // Hz: C4
/// Where twelve sections end below 6 kHz the loop's poles beyond lie up to hundreds of cents off, and are no longer
/// partials of that string. They still decay with it, though stiff bass strings miss the 4 per cent there; so much is
/// kept where a partial lasts a while, and loses less than half a neper a round.
constexpr double t60ShareBeyond = 0.10, lastingLoss = 0.5;

struct JudgedString {
    std::string name;
    string::Partials partials;
    bool plain;
};

/// The worst that was seen of one figure, and where.
struct Worst {
    const char* what;
    double goal;
    double scale = 1.0; // to the unit that is printed
    double value = -1.0;
    std::string where = "";

    void see(double seen, const std::string& name, double rate, int n) {
        if (seen > value) {
            value = seen;
            where = name + ", " + std::to_string(static_cast<int>(rate)) + " Hz" +
                    (n > 0 ? ", partial " + std::to_string(n) : "");
        }
    }
    void print() const {
        std::printf("  %-52s goal %8.3g   worst %9.3g   %s\n", what, scale * goal, scale * value, where.c_str());
    }
};

struct Table {
    Worst first{"f1, cents", firstCents};
    Worst live{"live: partials to X(n) = K - 1.2, cents", liveCents};
    Worst reference{"reference: partials to 10 kHz or n = 120, cents", referenceCents};
    Worst mean{"reference: the same, root mean square, cents", referenceMean};
    Worst t60{"T60 to 6 kHz, per cent", t60Share, 100.0};
    Worst treble{"T60 to 6 kHz, plain strings above C4, per cent", t60ShareOfPlainTreble, 100.0};
    Worst beyond{"T60 to 6 kHz, live, beyond the covered partials", t60ShareBeyond, 100.0};
    Worst gain{"loop gain less 1, under", 0.0};
    int loops = 0;

    void print(const char* of) const {
        std::printf("Accuracy of %d loops, %s:\n", loops, of);
        for (const Worst* row : {&first, &live, &reference, &mean, &t60, &treble, &beyond, &gain})
            row->print();
    }
};

/// X(n) = n − f/(df/dn), the slope by differences.
double sectionsWanted(const string::Partials& partials, int n) {
    const double h = 1e-4, slope = (partials.frequency(n + h) - partials.frequency(n - h)) / (2.0 * h);
    return (partials.ends().oneFree() ? n - 0.5 : n) - partials.frequency(n) / slope;
}

void judge(Table& table, const JudgedString& string, double rate, Quality quality) {
    INFO(string.name << " at " << rate << " Hz, " << (quality == Quality::live ? "live" : "reference"));
    const string::Partials& partials = string.partials;
    auto made = makeLoop(partials, {rate, quality});
    INFO((made ? std::string() : made.error().message));
    REQUIRE(made);
    const LoopDesign& loop = *made;
    const support::RunningLoop running(loop);
    ++table.loops;
    CHECK(loop.sections.size() <= (quality == Quality::live ? 12u : 60u));

    const double reach = static_cast<double>(loop.sections.size()) - 1.2;
    double sum = 0.0, worst = 0.0, worstT60 = 0.0, worstBeyond = 0.0, reportDiffers = 0.0;
    double stretch = 1.0, before = 1.0; // of poles against partials, which beyond the covered ones drift apart steadily
    int counted = 0, worstAt = 0, worstT60At = 0;
    bool within = true;
    for (int n = 1; n <= mostPartials; ++n) {
        const double target = partials.frequency(n), decay = partials.decayRate(n);
        within = within && target <= std::min(accurateTo, 0.42 * rate) &&
                 (n == 1 || quality == Quality::reference || sectionsWanted(partials, n) <= reach);
        if (!within && (target > t60To || target > 0.42 * rate))
            break;
        const auto pole = running.poleNear(stretch * stretch / before * target, decay);
        before = std::exchange(stretch, pole.frequency / target);
        const double cents = analysis::centsBetween(pole.frequency, target);
        const double t60 = std::abs(decay / pole.decayRate - 1.0);
        if (n == 1) {
            CHECK(std::abs(cents) <= firstCents);
            table.first.see(std::abs(cents), string.name, rate, 0);
        }
        if (within) {
            CHECK(loop.accuracy.coveragePartial >= n); // the reach that is reported
            ++counted;
            sum += cents * cents;
            if (std::abs(cents) > worst) {
                worst = std::abs(cents);
                worstAt = n;
            }
        }
        const bool lasts = decay < lastingLoss * partials.slope(n);
        if (target <= t60To && (lasts || n <= loop.accuracy.coveragePartial)) {
            double& of = n <= loop.accuracy.coveragePartial ? worstT60 : worstBeyond;
            if (&of == &worstT60 && t60 > of)
                worstT60At = n;
            of = std::max(of, t60);
        }
        for (const auto& reported : loop.accuracy.partials)
            if (reported.number == n)
                reportDiffers = std::max({reportDiffers, std::abs(reported.cents - cents),
                                          100.0 * std::abs(reported.t60Ratio * pole.decayRate / decay - 1.0)});
    }
    CHECK(reportDiffers < 1e-3); // cents, per cent: the report that goes with the design says the same
    INFO("partial " << worstAt << ", T60 at partial " << worstT60At);
    Worst& ofQuality = quality == Quality::live ? table.live : table.reference;
    CHECK(worst <= ofQuality.goal);
    ofQuality.see(worst, string.name, rate, worstAt);
    if (quality == Quality::reference) {
        const double mean = std::sqrt(sum / std::max(1, counted));
        CHECK(mean <= referenceMean);
        table.mean.see(mean, string.name, rate, 0);
    }
    Worst& ofT60 = string.plain && partials.frequency(1) > middleC ? table.treble : table.t60;
    CHECK(worstT60 <= ofT60.goal);
    ofT60.see(worstT60, string.name, rate, worstT60At);
    CHECK(worstBeyond <= t60ShareBeyond);
    table.beyond.see(worstBeyond, string.name, rate, 0);

    const double gain = running.peakGain(100);
    CHECK(gain < 1.0);
    table.gain.see(gain - 1.0, string.name, rate, 0);
}

const double rates[] = {44100.0, 48000.0, 96000.0, 192000.0};

/// Any material, gauge, length and stress that an instrument could hold, every fourth string wound; none lower than
/// the lowest of a piano or higher than its highest, and no bars.
std::vector<JudgedString> randomStrings(std::size_t count) {
    std::mt19937 random(2026);
    const auto between = [&](double low, double high) {
        return low * std::pow(high / low, std::uniform_real_distribution<double>()(random));
    };
    const auto& materials = string::builtInMaterials();
    std::vector<JudgedString> strings;
    while (strings.size() < count) {
        const auto& material = materials[random() % materials.size()];
        string::Description description;
        description.speakingLength = between(0.08, 1.6);
        const bool metal = material.youngsModulus > 20e9, wound = random() % 4 == 0;
        const double diameter = metal ? between(0.2e-3, 1.5e-3) : between(0.4e-3, 2e-3);
        description.build.core = {material, diameter, string::CoreShape::round, string::Measured::slack};
        if (wound) {
            string::Winding winding;
            winding.material = *string::findBuiltInMaterial("phosphor bronze");
            winding.diameter = diameter * between(0.2, 1.0);
            winding.loss = 2e-4;
            description.build.windings = {winding};
        }
        const double share = std::uniform_real_distribution<double>(0.1, 0.8)(random);
        const auto strung = string::strungToTension(
            description, share * material.strengthAt(diameter) * string::coreArea(description.build));
        if (!strung)
            continue;
        const double f1 = strung->partials.frequency(1);
        if (f1 < 27.5 || f1 > 4186.0 || strung->statics.inharmonicity > 0.05)
            continue;
        char name[120];
        std::snprintf(name, sizeof name, "#%zu %s%s, %.2f mm x %.0f mm, %.0f Hz", strings.size(),
                      material.name.c_str(), wound ? " wound" : "", 1e3 * diameter,
                      1e3 * description.speakingLength, f1);
        strings.push_back({name, strung->partials, !wound});
    }
    return strings;
}

} // namespace

// Turned red by: a sample of delay too much in the engine's loop, the energy's decay for the amplitude's, a wrong sign in
// a second-order shelf. (Not by the loss of a period for that of a round trip: the last fit is at the damped poles, which
// need no such target.)
TEST_CASE("accuracy of the yardstick strings", "[design]") {
    Table table;
    for (const auto& string : yardstick::strings())
        for (const double rate : rates)
            for (const Quality quality : {Quality::live, Quality::reference})
                judge(table, {string.name, string.partials(), true}, rate, quality); // the wound ones lie below C4
    table.print("yardstick strings at four rates, live and reference");
}

TEST_CASE("accuracy of random strings", "[design][random]") {
    const bool whole = std::getenv("HITCHPIN_LONG_TESTS") != nullptr;
    const std::size_t count = whole ? 200 : 20;
    Table table;
    for (const auto& string : randomStrings(count))
        for (const double rate : rates)
            for (const Quality quality : {Quality::live, Quality::reference})
                judge(table, string, rate, quality);
    table.print((std::to_string(count) + " random strings at four rates, live and reference").c_str());
}

// Turned red by: a second-order shelf that the engine steps with a12 for a21.
TEST_CASE("accuracy: poles of the loop and sound of the engine agree", "[design][engine]") {
    struct Heard {
        const char* name;
        double rate;
        Quality quality;
    };
    double worstCents = 0.0, worstT60 = 0.0;
    int partialsHeard = 0;
    for (const auto& [name, rate, quality] : {Heard{"piano A2", 48000.0, Quality::live},
                                              Heard{"piano C6", 96000.0, Quality::live},
                                              Heard{"steel E2 wound", 44100.0, Quality::reference},
                                              Heard{"nylon C3", 48000.0, Quality::live},
                                              Heard{"bar-like, B 0.05", 48000.0, Quality::live},
                                              Heard{"brass C3, nut free", 44100.0, Quality::live}}) {
        const auto all = yardstick::strings();
        const auto& string =
            *std::find_if(all.begin(), all.end(), [&](const auto& s) { return s.name == std::string(name); });
        const string::Partials partials = string.partials();
        const auto loop = makeLoop(partials, {rate, quality});
        REQUIRE(loop);
        auto instrument = std::make_shared<InstrumentDesign>();
        instrument->sampleRate = rate;
        instrument->boards = {{}};
        instrument->courses = {{}};
        const double roundTrip = rate / partials.frequency(1) * (string.ends.oneFree() ? 0.5 : 1.0);
        instrument->strings = {support::stringOf(*loop, roundTrip, 0.5, string.ends)};
        engine::Engine engine(instrument);
        engine.pluck(0, {1.0, 0.07, 0.0, std::numbers::pi / 2.0});
        std::vector<double> sound(static_cast<std::size_t>(1.2 * rate));
        engine.process(sound.data(), nullptr, static_cast<int>(sound.size()));
        // From when all that the pluck sends is under way.
        sound.erase(sound.begin(), sound.begin() + static_cast<std::ptrdiff_t>(3.0 * roundTrip));

        const support::RunningLoop running(*loop);
        std::vector<double> expected;
        std::vector<support::RunningLoop::Pole> poles;
        for (int n = 1; n <= 13 && n <= loop->accuracy.coveragePartial; ++n) {
            poles.push_back(running.poleNear(partials.frequency(n), partials.decayRate(n)));
            expected.push_back(poles.back().frequency);
        }
        const auto measured = analysis::measurePartials(sound, rate, expected);
        for (std::size_t i = 0; i + 1 < expected.size(); ++i) { // the last is there to bound the band of the one before
            INFO(name << ", partial " << i + 1);
            REQUIRE(measured[i].frequency > 0.0);
            const double cents = std::abs(analysis::centsBetween(measured[i].frequency, poles[i].frequency));
            const double t60 = std::abs(measured[i].decayRate / poles[i].decayRate - 1.0);
            // What the meter itself keeps on clean sounds, tenfold: neighbours leak into each other's band.
            CHECK(cents < 1e-3);
            CHECK(t60 < 1e-3);
            worstCents = std::max(worstCents, cents);
            worstT60 = std::max(worstT60, t60);
            ++partialsHeard;
        }
    }
    std::printf("Accuracy: %d partials of the engine's sound differ from the poles by at most %.1e cents, T60 %.1e\n",
                partialsHeard, worstCents, worstT60);
    CHECK(partialsHeard > 50);
}
