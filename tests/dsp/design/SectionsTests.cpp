#include "dsp/design/Sections.h"
#include "tests/support/Worse.h"

#include "dsp/design/LoopModel.h"
#include "tests/support/LoopPoles.h"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <complex>
#include <iostream>
#include <numbers>
#include <random>

using namespace hitchpin::design;
using hitchpin::support::transferOf;

namespace {

constexpr double roundingErrors = 1e-12; // some hundred steps of double arithmetic on numbers near one

struct Ladder {
    LadderForm f;
    double m1 = 0.0, m2 = 0.0;
    double step(double x) {
        const double w = f.q2 * x - f.k2 * m2, y = f.k2 * x + f.q2 * m2;
        const double v = f.q1 * w - f.k1 * m1;
        m2 = f.k1 * w + f.q1 * m1;
        m1 = v;
        return y;
    }
};

AllpassSection anySection(std::mt19937& random) {
    std::uniform_real_distribution<double> exponent(-8.0, 3.0);
    return {std::exp(exponent(random)), std::exp(exponent(random))};
}

} // namespace

TEST_CASE("section, direct form is the bilinear map of its constants", "[design]") {
    std::mt19937 random(1);
    double worst = 0.0;
    for (int i = 0; i < 200; ++i) {
        const AllpassSection section = anySection(random);
        const auto [a1, a2] = directForm(section);
        for (const double omega : {0.001, 0.1, 1.0, 2.0, 3.1}) {
            const std::complex<double> back = std::polar(1.0, -omega), s(0.0, std::tan(0.5 * omega));
            const auto digital = (a2 + a1 * back + back * back) / (1.0 + a1 * back + a2 * back * back);
            const auto analogue =
                (s * s - section.c1 * s + section.c0) / (s * s + section.c1 * s + section.c0);
            worst = hitchpin::support::worse(worst, std::abs(digital - analogue));
            worst = hitchpin::support::worse(worst, std::abs(std::abs(digital) - 1.0));
        }
        CHECK(std::abs(a2) < 1.0); // the triangle of stability
        CHECK(std::abs(a1) < 1.0 + a2);
    }
    INFO("worst difference " << worst);
    CHECK(worst < 1e-9); // a1 and a2 cancel against 1 where c0, c1 are small
}

TEST_CASE("section, ladder sounds like direct form and keeps its energy to the last digits", "[design]") {
    std::mt19937 random(2);
    std::normal_distribution<double> noise;
    double worstDifference = 0.0, worstEnergy = 0.0;
    for (int i = 0; i < 50; ++i) {
        const AllpassSection section = anySection(random);
        const auto [a1, a2] = directForm(section);
        const LadderForm form = ladderForm(section);
        CHECK(std::abs(form.k1 * form.k1 + form.q1 * form.q1 - 1.0) < roundingErrors);
        CHECK(std::abs(form.k2 * form.k2 + form.q2 * form.q2 - 1.0) < roundingErrors);
        Ladder ladder{form};
        double x1 = 0.0, x2 = 0.0, y1 = 0.0, y2 = 0.0;
        for (int n = 0; n < 300; ++n) {
            const double x = n < 100 ? noise(random) : 0.0;
            const double before = x * x + ladder.m1 * ladder.m1 + ladder.m2 * ladder.m2;
            const double y = ladder.step(x);
            const double after = y * y + ladder.m1 * ladder.m1 + ladder.m2 * ladder.m2;
            const double direct = a2 * x + a1 * x1 + x2 - a1 * y1 - a2 * y2;
            x2 = x1, x1 = x, y2 = y1, y1 = direct;
            worstDifference = hitchpin::support::worse(worstDifference, std::abs(direct - y));
            worstEnergy = hitchpin::support::worse(worstEnergy, std::abs(after - before) / (1.0 + before));
        }
    }
    INFO("worst difference " << worstDifference << ", worst change of energy " << worstEnergy);
    CHECK(worstDifference < 1e-7); // the direct form's own rounding near the circle
    CHECK(worstEnergy < roundingErrors);
}

namespace {

LossShelf anyShelf(std::mt19937& random, int order) {
    std::uniform_real_distribution<double> corner(-7.0, 3.0), depth(-9.0, 2.5);
    return {random() % 2 ? LossShelf::Loses::high : LossShelf::Loses::low, order, std::exp(corner(random)),
            std::exp(depth(random))};
}

/// The shelf as LoopDesign.h defines it, at s = j·tan(ω/2).
std::complex<double> shelfAt(const LossShelf& shelf, double omega) {
    const auto polynomial = [&](double w, std::complex<double> s) {
        return shelf.order == 1 ? w + s : w * w + std::numbers::sqrt2 * w * s + s * s;
    };
    const std::complex<double> s(0.0, std::tan(0.5 * omega));
    const double w = shelf.corner, gamma = std::exp(-shelf.depth);
    return (shelf.loses == LossShelf::Loses::high ? polynomial(w, gamma * s) : polynomial(gamma * w, s)) /
           polynomial(w, s);
}

/// Feeds noise and then nothing: the largest growth of y² + |m|² over x² + |m|².
template <class Step>
double worstGrowth(std::mt19937& random, Step step) {
    std::normal_distribution<double> noise;
    double worst = -1.0, m1 = 0.0, m2 = 0.0;
    for (int n = 0; n < 400; ++n) {
        const double x = n < 150 ? noise(random) : 0.0;
        const double before = x * x + m1 * m1 + m2 * m2, y = step(x, m1, m2);
        worst = std::max(worst, (y * y + m1 * m1 + m2 * m2 - before) / (1.0 + before));
    }
    return worst;
}

} // namespace

// Turned red by: a wrong sign in A₂₁, a low shelf that is not mirrored.
TEST_CASE("shelf, forms are the bilinear map of the formula and never make energy", "[design]") {
    std::mt19937 random(3);
    double worst = 0.0, growth = -1.0, gain = 0.0;
    for (int i = 0; i < 400; ++i) {
        const LossShelf shelf = anyShelf(random, 1), steep = anyShelf(random, 2);
        const ShelfForm one = shelfForm(shelf);
        const SteepShelfForm two = steepShelfForm(steep);
        for (const double omega : {0.001, 0.1, 1.0, 2.0, 3.1}) {
            const hitchpin::support::LongComplex z = std::polar(1.0L, static_cast<long double>(omega));
            const std::complex<double> first(transferOf(one, z)), second(transferOf(two, z));
            worst = std::max({worst, std::abs(first - shelfAt(shelf, omega)), std::abs(second - shelfAt(steep, omega))});
            gain = std::max({gain, std::abs(first), std::abs(second)});
        }
        growth = std::max(growth, worstGrowth(random, [&](double x, double& m, double&) {
            const double y = one.d * x + one.c * m;
            m = one.b * x + one.a * m;
            return y;
        }));
        growth = std::max(growth, worstGrowth(random, [&](double x, double& m1, double& m2) {
            const double y = two.d * x + two.c1 * m1 + two.c2 * m2;
            const double next = two.b1 * x + two.a11 * m1 + two.a12 * m2;
            m2 = two.b2 * x + two.a21 * m1 + two.a22 * m2;
            m1 = next;
            return y;
        }));
    }
    std::cout << "shelves: worst difference from the formula " << worst << ", largest growth of energy " << growth
              << ", largest gain 1 + " << gain - 1.0 << "\n";
    CHECK(worst < 1e-11); // 1 − z and 1 − a cancel where the corner is low
    CHECK(growth < 1e-14); // a few roundings of numbers near one
    CHECK(gain <= 1.0 + 1e-11);
}

TEST_CASE("shelf, second order takes as little below its corner as x to the fourth", "[design]") {
    // |H|² = (w⁴ + γ⁴x⁴)/(w⁴ + x⁴), so that half the frequency loses a sixteenth (flat to the fourth order: Butterworth
    // 1930).
    for (const int order : {1, 2}) {
        const LossShelf shelf{LossShelf::Loses::high, order, 0.5, 0.8};
        const ShelfLoss loss(shelf);
        const double here = loss.at(1e-6).excess, half = loss.at(0.25e-6).excess;
        CHECK(std::abs(here / half / std::pow(4.0, order) - 1.0) < 1e-4);
        CHECK(std::abs(0.5 * std::log1p(loss.at(1e12).excess) - order * shelf.depth) < 1e-9); // all of it far above
        for (const double omega : {0.1, 0.5, 1.0, 2.0})
            CHECK(std::abs(0.5 * std::log1p(loss.at(std::pow(std::tan(0.5 * omega), 2)).excess) +
                           std::log(std::abs(shelfAt(shelf, omega)))) < 1e-14);
    }
}

TEST_CASE("thiran, coefficient and delay", "[design]") {
    CHECK(thiranCoefficient(1.0) == 0.0); // a bare sample
    for (const double delay : {0.3, 0.5, 0.99, 1.3, 1.5}) {
        CHECK(std::abs(thiranDelay(thiranCoefficient(delay)) - delay) < 1e-15 * 8);
        // The delay at low frequencies: minus the slope of the phase.
        const double a = thiranCoefficient(delay), omega = 1e-4;
        const std::complex<double> back = std::polar(1.0, -omega);
        CHECK(std::abs(-std::arg((a + back) / (1.0 + a * back)) / omega - delay) < 1e-8);
    }
}
