// The meter against sounds whose partials are known: in closed form, and from SciPy (tests/data).
#include "dsp/analysis/Measure.h"
#include "tests/support/Worse.h"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <fstream>
#include <iostream>
#include <numbers>
#include <random>
#include <string>

using namespace hitchpin::analysis;

namespace {

struct Known {
    double frequency, decayRate, amplitude;
};

struct Worst {
    double cents = 0.0, decay = 0.0, amplitude = 0.0;
    int missed = 0;
};

Worst worstOf(const std::vector<MeasuredPartial>& measured, const std::vector<Known>& known) {
    using hitchpin::support::worse;
    Worst worst;
    for (std::size_t i = 0; i < known.size(); ++i) {
        if (measured[i].frequency == 0.0) {
            ++worst.missed;
            continue;
        }
        worst.cents = worse(
            worst.cents, std::abs(centsBetween(measured[i].frequency, known[i].frequency)));
        worst.decay = worse(worst.decay, std::abs(measured[i].decayRate / known[i].decayRate - 1.0));
        worst.amplitude = worse(
            worst.amplitude, std::abs(measured[i].amplitude / known[i].amplitude - 1.0));
    }
    return worst;
}

void report(const std::string& what, const Worst& worst) {
    std::cout << "meter, " << what << ": worst " << worst.cents << " cents, decay " << 100.0 * worst.decay
              << " per cent, amplitude " << 100.0 * worst.amplitude << " per cent, missed " << worst.missed
              << '\n';
}

std::vector<double> soundOf(const std::vector<Known>& partials, double rate, double seconds) {
    std::vector<double> sound(static_cast<std::size_t>(rate * seconds));
    for (std::size_t k = 0; k < partials.size(); ++k)
        for (std::size_t i = 0; i < sound.size(); ++i) {
            const double time = static_cast<double>(i) / rate;
            sound[i] +=
                partials[k].amplitude * std::exp(-partials[k].decayRate * time) *
                std::cos(2.0 * std::numbers::pi * partials[k].frequency * time + static_cast<double>(k));
        }
    return sound;
}

std::vector<Known> stringLike(double f0, double inharmonicity, double highest) {
    std::vector<Known> partials;
    for (int n = 1; n <= 60; ++n) {
        const double f = n * f0 * std::sqrt(1.0 + inharmonicity * n * n);
        if (f > highest)
            break;
        partials.push_back({f, 0.3 + 2e-4 * f + 0.016 * std::sqrt(f), 1.0 / n});
    }
    return partials;
}

/// Off by up to a tenth of the way to the neighbour, as a prediction may be.
std::vector<double> roughly(const std::vector<Known>& partials) {
    std::vector<double> expected;
    for (std::size_t i = 0; i < partials.size(); ++i)
        expected.push_back(partials[i].frequency +
                           0.1 * partials[0].frequency * std::sin(3.0 * static_cast<double>(i)));
    return expected;
}

struct Committed {
    double rate = 0.0;
    std::vector<Known> partials;
    std::vector<double> sound;
};

Committed committed(const std::string& wanted) {
    std::ifstream file(std::string(HITCHPIN_SOURCE_DIR) + "/tests/data/damped-partials.txt");
    std::string word, name;
    while (file >> word >> name) {
        Committed found;
        std::size_t partialCount = 0, sampleCount = 0;
        file >> found.rate >> partialCount >> sampleCount;
        found.partials.resize(partialCount);
        found.sound.resize(sampleCount);
        for (Known& partial : found.partials)
            file >> partial.frequency >> partial.decayRate >> partial.amplitude;
        for (double& sample : found.sound)
            file >> sample;
        if (name == wanted && file)
            return found;
    }
    FAIL("tests/data/damped-partials.txt has no sound called " << wanted);
    return {};
}

/// What the meter promises on clean sounds.
constexpr double cleanCents = 0.001;
constexpr double cleanShare = 0.001;

} // namespace

TEST_CASE("meter, clean sounds of known partials", "[analysis]") {
    struct Case {
        const char* name;
        double f0, rate, seconds;
    };
    for (const Case& c :
         {Case{"A0, 1 s at 48 kHz", 27.5, 48000.0, 1.0}, Case{"A2, 1 s at 48 kHz", 110.0, 48000.0, 1.0},
          Case{"A4, 2 s at 22.05 kHz", 440.0, 22050.0, 2.0},
          Case{"C8, 1 s at 48 kHz", 4186.0, 48000.0, 1.0}}) {
        const auto partials = stringLike(c.f0, 2e-4, 0.44 * c.rate);
        const auto worst = worstOf(
            measurePartials(soundOf(partials, c.rate, c.seconds), c.rate, roughly(partials)), partials);
        report(c.name, worst);
        CHECK(worst.missed == 0);
        CHECK(worst.cents <= cleanCents);
        CHECK(worst.decay <= cleanShare);
        CHECK(worst.amplitude <= cleanShare);
    }
}

TEST_CASE("meter, a chain of masses solved by SciPy", "[analysis]") {
    const Committed data = committed("chain");
    const auto worst = worstOf(measurePartials(data.sound, data.rate, roughly(data.partials)), data.partials);
    report("chain of masses", worst);
    CHECK(worst.missed == 0);
    CHECK(worst.cents <= cleanCents);
    CHECK(worst.decay <= cleanShare);
    CHECK(worst.amplitude <= cleanShare);
}

TEST_CASE("meter, noise 40 dB down agrees with the fit by SciPy", "[analysis]") {
    // SciPy fits all partials to all samples; the meter fits each band for itself and leaves out the band
    // filter's rise, so the two differ, but by less than the noise alone spreads any estimate of the weakest
    // partial: the bound of Rao and Cramér, from the inverse of the information matrix at the true values.
    constexpr double spreadCents = 0.0110, spreadDecay = 0.0046, spreadAmplitude = 0.0032;
    const Committed data = committed("noisy");
    const auto measured = measurePartials(data.sound, data.rate, roughly(data.partials));
    const auto worst = worstOf(measured, data.partials);
    report("noise 40 dB down", worst);
    CHECK(worst.missed == 0);
    CHECK(worst.cents <= spreadCents);
    CHECK(worst.decay <= spreadDecay);
    CHECK(worst.amplitude <= spreadAmplitude);
    for (const MeasuredPartial& partial : measured)
        CHECK(partial.residual < 0.01);
}

TEST_CASE("meter, a weak partial beside strong neighbours", "[analysis]") {
    // 60 dB under both neighbours, one string's spacing away.
    const std::vector<Known> partials{{220.0, 1.5, 1.0}, {440.5, 2.0, 1e-3}, {661.5, 2.5, 1.0}};
    const auto worst =
        worstOf(measurePartials(soundOf(partials, 44100.0, 1.5), 44100.0, roughly(partials)), partials);
    report("60 dB under its neighbours", worst);
    CHECK(worst.missed == 0);
    CHECK(worst.cents <= cleanCents);
    CHECK(worst.decay <= cleanShare);
}

TEST_CASE("meter, of two strings that beat it takes the stronger", "[analysis]") {
    const std::vector<Known> both{{440.0, 2.0, 1.0}, {440.7, 1.2, 0.3}};
    const auto measured = measurePartials(soundOf(both, 48000.0, 3.0), 48000.0, std::vector<double>{440.2});
    std::cout << "meter, beating pair: " << centsBetween(measured[0].frequency, 440.0) << " cents, decay "
              << 100.0 * (measured[0].decayRate / 2.0 - 1.0) << " per cent\n";
    CHECK(std::abs(centsBetween(measured[0].frequency, 440.0)) <= 0.01);
    CHECK(std::abs(measured[0].decayRate / 2.0 - 1.0) <= 0.01);
}

TEST_CASE("meter, slow beats and two stage decay", "[analysis]") {
    // Two strings a cent apart (one beat in four seconds), and one partial that rings down fast first and
    // slowly after, as unisons on a yielding bridge do. The stronger one in energy is named.
    struct Case {
        const char* name;
        std::vector<Known> both;
        std::size_t stronger;
    };
    for (const Case& c : {Case{"a cent apart", {{440.0, 1.0, 1.0}, {440.254, 1.0, 0.6}}, 0},
                          Case{"two stages", {{261.6, 12.0, 1.0}, {261.6, 0.7, 0.4}}, 1}}) {
        // Noise 40 dB down, in which the first tenth of a second, from which the estimate starts, shows but
        // one.
        auto sound = soundOf(c.both, 48000.0, 3.0);
        std::mt19937 random(5);
        std::normal_distribution<double> normal;
        for (double& sample : sound)
            sample += 0.01 * normal(random);
        const auto measured = measurePartials(sound, 48000.0, std::vector<double>{c.both[0].frequency});
        const Known& known = c.both[c.stronger];
        std::cout << "meter, " << c.name << ": " << centsBetween(measured[0].frequency, known.frequency)
                  << " cents, decay " << 100.0 * (measured[0].decayRate / known.decayRate - 1.0)
                  << " per cent\n";
        CHECK(std::abs(centsBetween(measured[0].frequency, known.frequency)) <= 0.01);
        CHECK(std::abs(measured[0].decayRate / known.decayRate - 1.0) <= 0.01);
        CHECK(std::abs(measured[0].amplitude / known.amplitude - 1.0) <= 0.01);
    }
}

TEST_CASE("meter, the residual is the share of noise", "[analysis]") {
    // Twice the noise leaves four times the energy, and none leaves next to nothing.
    const std::vector<Known> partials{{440.0, 2.0, 1.0}, {881.0, 3.0, 0.5}};
    const auto residualAt = [&](double noise) {
        auto sound = soundOf(partials, 48000.0, 1.0);
        std::mt19937 random(3);
        std::normal_distribution<double> normal;
        for (double& sample : sound)
            sample += noise * normal(random);
        return measurePartials(sound, 48000.0, roughly(partials))[0].residual;
    };
    CHECK(residualAt(0.0) < 1e-8);
    CHECK(residualAt(0.02) > 1e-6);
    CHECK(residualAt(0.02) / residualAt(0.01) > 3.0);
    CHECK(residualAt(0.02) / residualAt(0.01) < 5.0);
}

TEST_CASE("meter, what is not there is not found", "[analysis]") {
    const double rate = 44100.0;
    std::vector<double> noise(44100);
    std::mt19937 random(7);
    std::normal_distribution<double> normal;
    for (double& sample : noise)
        sample = normal(random);
    CHECK(measurePartials(noise, rate, std::vector<double>{1000.0})[0].frequency == 0.0);
    CHECK(measurePartials(std::vector<double>(44100, 0.0), rate, std::vector<double>{1000.0})[0].frequency ==
          0.0);
    CHECK(measurePartials(std::vector<double>{}, rate, std::vector<double>{1000.0})[0].frequency == 0.0);

    // A partial over half the rate, and one that the pluck point took away between two that sound.
    const std::vector<Known> sounding{{500.0, 1.0, 1.0}, {1500.0, 1.0, 1.0}};
    const auto sound = soundOf(sounding, rate, 1.0);
    const auto measured = measurePartials(sound, rate, std::vector<double>{500.0, 1000.0, 1500.0, 23000.0});
    CHECK(measured[0].frequency != 0.0);
    CHECK(measured[1].frequency == 0.0);
    CHECK(measured[2].frequency != 0.0);
    CHECK(measured[3].frequency == 0.0);
}

TEST_CASE("cents between frequencies", "[analysis]") {
    // An octave is 1200 cents by definition (Ellis 1885); the pure fifth is 701.9550.
    CHECK(std::abs(centsBetween(880.0, 440.0) - 1200.0) < 1e-12);
    CHECK(std::abs(centsBetween(660.0, 440.0) - 701.9550) < 1e-4);
}
