// Where partials lie. Exact ratios: the determinant of the tensioned beam in 40-digit arithmetic; closed forms:
// Fletcher, JASA 36:203 (1964); a second oracle: beam elements.
#include "dsp/analysis/Measure.h"
#include "dsp/string/BareEnds.h"
#include "dsp/string/FrequencyDeterminant.h"
#include "dsp/string/Partials.h"
#include "tests/support/BeamElements.h"
#include "tests/support/Worse.h"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <iostream>

using namespace hitchpin::string;
using hitchpin::analysis::centsBetween;
using hitchpin::support::beamRatios;
using hitchpin::support::bordersForEnds;

namespace {

constexpr double printed = 6e-9; // the table has eight decimals

Partials uniform(double b, Ends ends = {}, int count = 64) { return {100.0, b, ends, {}, count}; }

} // namespace

// Turned red by: ε used for B (9.87 times off), F0 for f1.
TEST_CASE("Partials of the three kinds of held ends are the determinant's roots", "[string]") {
    struct Row {
        double b;
        int n;
        double hinged, clamped, mixed;
    };
    const Row rows[] = {{1e-4, 1, 1.00005000, 1.00645741, 1.00324347},    {1e-4, 10, 10.04987562, 10.11436339, 10.08201759},
                        {1e-3, 1, 1.00049988, 1.02105841, 1.01067473},    {1e-3, 10, 10.48808848, 10.70534639, 10.59572152},
                        {1e-2, 1, 1.00498756, 1.07337341, 1.03807016},    {1e-2, 5, 5.59016994, 5.96807631, 5.77436768},
                        {1e-2, 10, 14.14213562, 14.99955765, 14.56426537}};
    double worst = 0.0;
    for (const auto& row : rows) {
        CAPTURE(row.b, row.n);
        const auto at = [&](Ends ends) { return uniform(row.b, ends).frequency(row.n) / 100.0; };
        for (const double off : {at({}) - row.hinged, at({End::clamped, End::clamped}) - row.clamped,
                                 at({End::hinged, End::clamped}) - row.mixed, at({End::clamped, End::hinged}) - row.mixed}) {
            CHECK(std::abs(off) <= printed);
            worst = hitchpin::support::worse(worst, std::abs(off));
        }
    }
    std::cout << "partials of held ends against 40-digit roots: worst " << worst << " (allowed " << printed << ")\n";
}

// B = 3.770189e-4 (ε = 3.82e-5): cents above n·F0, computed in 40-digit arithmetic.
TEST_CASE("The partials of a piano's C4 stand where published", "[string]") {
    const std::pair<int, double> rows[] = {{1, .3263},   {2, 1.3044},   {3, 2.9322},   {4, 5.2060},  {5, 8.1206},
                                           {8, 20.6386}, {10, 32.0352}, {16, 79.7568}, {20, 121.5880}};
    const Partials partials = uniform(3.770189e-4);
    for (const auto& [n, sharp] : rows)
        CHECK(centsBetween(partials.frequency(n), 100.0 * n) == Approx(sharp).margin(1e-3));
}

// Fletcher's clamped form is a series in √B; at B = 0.01 and n = 10 it is 11.5 cents sharp, so it must not be used.
TEST_CASE("The series for clamped ends is good for slender strings and wrong for stiff ones", "[string]") {
    const auto series = [](double b, int n) {
        return n * std::sqrt(1.0 + b * n * n) * (1.0 + 2.0 / M_PI * std::sqrt(b) + 4.0 / (M_PI * M_PI) * b);
    };
    const auto error = [&](double b, int n) {
        return centsBetween(series(b, n), uniform(b, {End::clamped, End::clamped}).frequency(n) / 100.0);
    };
    CHECK(error(1e-4, 1) == Approx(-.0006).margin(1e-4));
    CHECK(error(1e-4, 10) == Approx(-.017).margin(1e-3));
    CHECK(error(1e-3, 1) == Approx(-.019).margin(1e-3));
    CHECK(error(1e-3, 10) == Approx(-.30).margin(5e-3));
    CHECK(error(1e-2, 1) == Approx(-.54).margin(5e-3));
    CHECK(error(1e-2, 5) == Approx(.18).margin(5e-3));
    CHECK(error(1e-2, 10) == Approx(11.5).margin(.05));
}

// Two textbook forms: f_n = n·F0·√(1+Bn²) (Fletcher 1964) and f_n = n·f1·[1 + (n²−1)A], A = B/2 (Rossing; from
// memory). They are the same to first order only if f1 is not taken for F0.
TEST_CASE("F0 is not f1, and the two textbook forms agree to first order", "[string]") {
    const double b = 1e-4;
    const Partials partials = uniform(b);
    CHECK(partials.frequency(1) == Approx(100.0 * std::sqrt(1.0 + b)).epsilon(1e-14));
    for (int n = 2; n <= 8; ++n) {
        const double rossing = n * partials.frequency(1) * (1.0 + (n * n - 1) * b / 2.0);
        CHECK(std::abs(centsBetween(rossing, partials.frequency(n))) < 0.05);
    }
}

TEST_CASE("Beam elements agree with closed form and determinant for every pair of ends", "[string]") {
    const End all[] = {End::hinged, End::clamped, End::free};
    double worst = 0.0;
    for (const double b : {1e-4, 1e-3, 1e-2, 5e-2})
        for (const End nut : all)
            for (const End bridge : all) {
                const Ends ends{nut, bridge};
                const auto elements = beamRatios(b, ends, 10, bordersForEnds(b, 160));
                const auto roots = partialRatios(b, ends, 10);
                const Partials partials = uniform(b, ends);
                for (int n = 1; n <= 10; ++n) {
                    const double expected = elements[static_cast<std::size_t>(n - 1)];
                    const double off = std::max(std::abs(centsBetween(roots[static_cast<std::size_t>(n - 1)], expected)),
                                                std::abs(centsBetween(partials.frequency(n) / 100.0, expected)));
                    if (off > 3e-3)
                        UNSCOPED_INFO("B " << b << " ends " << int(nut) << int(bridge) << " n " << n << ": " << off);
                    worst = hitchpin::support::worse(worst, off);
                }
            }
    // Elements of this size put the tenth partial of a beam 0.0018 cent too high.
    std::cout << "nine pairs of ends, beam elements against roots: worst " << worst << " cent (allowed 0.003)\n";
    CHECK(worst <= 3e-3);
}

namespace {

/// Steps of mass in shares, as beam elements whose borders lie on them.
std::vector<double> bordersOn(std::vector<double> steps, int between) {
    steps.push_back(0.0);
    steps.push_back(1.0);
    std::sort(steps.begin(), steps.end());
    steps.erase(std::unique(steps.begin(), steps.end()), steps.end()); // no element without length
    std::vector<double> borders{0.0};
    for (std::size_t i = 1; i < steps.size(); ++i) {
        const double width = steps[i] - steps[i - 1];
        const int count = std::max(3, static_cast<int>(between * width));
        for (int k = 1; k <= count; ++k)
            borders.push_back(steps[i - 1] + width * k / count);
    }
    return borders;
}

} // namespace

// Turned red by: the nut's bare length taken at the bridge too, or both at the nut.
TEST_CASE("Bare ends of windings agree with beam elements", "[string]") {
    // With as many sines as a schedule's 24 partials take, a tenth of what a live loop may err by; with as many as
    // the sound takes, a hundredth.
    constexpr double forSchedule = 0.1, forSound = 0.01; // cents
    double worst = 0.0, worstForSound = 0.0;
    struct Case {
        double b;
        MassSteps steps;
    };
    const Case cases[] = {{5e-5, {{.0125, .0125, .87, .87}}},
                          {2e-4, {{.03, .01, .9, .9}}},
                          {1e-4, {{.01, .015, .3, .3}, {.025, .02, .6, .6}}},
                          {1e-3, {{0.0, .05, .8, .8}}}};
    for (const auto& [b, steps] : cases) {
        std::vector<double> places;
        for (const auto& step : steps) {
            places.push_back(step.nutShare);
            places.push_back(1.0 - step.bridgeShare);
        }
        const auto mass = [&](double x) {
            double rest = 1.0;
            for (const auto& step : steps)
                rest -= (x < step.nutShare ? step.lackNut : 0.0) + (x > 1.0 - step.bridgeShare ? step.lackBridge : 0.0);
            return rest;
        };
        const auto elements = beamRatios(b, {}, 24, bordersOn(places, 260), mass);
        CAPTURE(b);
        REQUIRE(std::all_of(elements.begin(), elements.end(), [](double ratio) { return std::isfinite(ratio); }));
        const auto few = steppedRatios(b, steps, 24), many = steppedRatios(b, steps, 128);
        for (std::size_t n = 0; n < 24; ++n) {
            worst = hitchpin::support::worse(worst, std::abs(centsBetween(few[n], elements[n])));
            worstForSound = hitchpin::support::worse(worstForSound, std::abs(centsBetween(many[n], elements[n])));
        }
    }
    std::cout << "bare ends, 24 partials against beam elements: worst " << worst << " cent (allowed " << forSchedule
              << "), with the sound's sines " << worstForSound << " (allowed " << forSound << ")\n";
    CHECK(worst <= forSchedule);
    CHECK(worstForSound <= forSound);
}

// Chumnantas (PhD, Edinburgh 1995; abstract) found that bare ends add inharmonicity of their own.
TEST_CASE("Bare ends move the inharmonicity by tens of per cent and the pitch hardly", "[string]") {
    const double b = 7.5e-5;
    const auto ratios = steppedRatios(b, {{.0125, .0125, .87, .87}}, 24);
    const double effective = effectiveInharmonicity(ratios);
    std::cout << "15 mm bare at each end of 1.2 m: B " << b << " becomes " << effective << "\n";
    CHECK(effective / b > 1.1);
    CHECK(effective / b < 2.0);
    CHECK(std::abs(centsBetween(ratios[0], std::sqrt(1.0 + b))) < 0.1);
    // And where nothing is bare, nothing changes.
    CHECK(effectiveInharmonicity(steppedRatios(b, {}, 24)) == Approx(b).epsilon(1e-9));
}

TEST_CASE("Between whole partials frequency and slope are smooth and agree", "[string]") {
    for (const Ends ends : {Ends{}, Ends{End::clamped, End::clamped}, Ends{End::hinged, End::free}, Ends{End::free, End::free}}) {
        const Partials partials = uniform(2e-3, ends);
        for (double n = 1.0; n < 60.0; n += 0.25) {
            const double h = 1e-4;
            const double slope = (partials.frequency(n + h) - partials.frequency(n - h)) / (2.0 * h);
            CHECK(partials.slope(n) == Approx(slope).epsilon(1e-6));
            CHECK(partials.slope(n + 0.25) > 0.0);
        }
    }
}

TEST_CASE("A free end leaves odd multiples, and its loop turns over", "[string]") {
    const Partials partials = uniform(0.0, {End::hinged, End::free});
    for (int n = 1; n <= 8; ++n)
        CHECK(partials.frequency(n) == Approx(100.0 * (n - 0.5)));
    CHECK(partials.ends().oneFree());
    CHECK_FALSE((Ends{End::free, End::free}.oneFree()));
    const Partials both = uniform(0.0, {End::free, End::free});
    CHECK(both.frequency(1) == Approx(100.0));
}
