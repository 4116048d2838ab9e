#include "dsp/design/Sections.h"
#include "tests/support/Worse.h"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <complex>
#include <numbers>
#include <random>

using namespace hitchpin::design;

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
