// How long partials ring. τ is the amplitude's time constant throughout: T60 = ln(1000)·τ = 2.1988·Q/f.
#include "dsp/string/Partials.h"
#include "dsp/string/Strung.h"
#include "tests/support/Worse.h"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <iostream>
#include <limits>

using namespace hitchpin::string;

namespace {

Partials ringing(Losses losses, double f0 = 100.0, double b = 0.0) { return {f0, b, {}, losses, 64}; }

} // namespace

TEST_CASE("Decay rate, Q and T60 are one figure said three ways", "[string]") {
    const Partials partials = ringing({0.0, 1e-3});
    CHECK(partials.inverseQ(1) == Approx(1e-3));
    CHECK(partials.t60(1) == Approx(2.1988 * 1000.0 / 100.0).epsilon(1e-4));
    CHECK(partials.decayRate(1) == Approx(M_PI * 100.0 * 1e-3));
    CHECK(8.6859 * partials.decayRate(1) == Approx(60.0 / partials.t60(1)).epsilon(1e-5)); // dB/s
}

// Stokes' cylinder. "exact" from Bessel functions, R = Re{iωρ_aπr²[1 + 4K₁(z)/(zK₀(z))]}, z = r√(iω/ν), and "closed" the
// form used here, both computed in 40-digit arithmetic; ν = 1.5e-5 m²/s, ρ_air = 1.2 kg/m³. Valette and Cuesta's
// R = 2πη + 2πd√(πηρ_a f) gives the same closed form.
// Turned red by: energy's time constant for the amplitude's (a factor of 2), a diameter for a radius.
TEST_CASE("Air damps a thin cylinder as Stokes found", "[string]") {
    struct Row {
        double r, f, density, exact, closed;
    };
    const Row rows[] = {{.5, 440, 7850, 10.311, 10.286}, {.127, 329.63, 7850, 2.335, 2.262}, {.355, 329.63, 1070, 1.092, 1.086}, {1.0, 100, 7850, 43.07, 42.95}};
    double worst = 0.0;
    for (const auto& row : rows) {
        const double r = row.r * 1e-3;
        const double tau = 1.0 / ringing({0.0, 0.0, r, row.density * M_PI * r * r}, row.f).decayRate(1);
        CAPTURE(row.r, row.f);
        CHECK(tau == Approx(row.closed).epsilon(5e-4));
        worst = hitchpin::support::worse(worst, std::abs(tau / row.exact - 1.0));
    }
    std::cout << "air: closed form against Bessel functions, worst " << 100.0 * worst << " % (allowed 3.5, on the finest string)\n";
    CHECK(worst < 0.035);
}

// Woodhouse, Acta Acustica 90:928 and 945 (2004), classical guitar strings of 0.65 m:
// η_n = [T(η_F + η_A/ω_n) + EI·η_B(nπ/L)²]/[T + EI(nπ/L)²]. The bending term is this library's δ·Bn²/(1+Bn²) with δ = η_B;
// the table's Q and T60 were computed in 40-digit arithmetic from his parameters.
TEST_CASE("Bending loss is Woodhouse's, and his strings ring as published", "[string]") {
    struct Row {
        const char* name;
        double t, mu, ei, etaF, etaA, etaB;
        double q1, q5, q10, q20, t60First, t60Tenth;
    };
    const Row rows[] = {{"E4", 70.3, .38, 130, 40, 1.5, 2.4, 891, 1756, 1745, 1196, 5.92, 1.16},
                        {"B3", 53.4, .52, 160, 40, 1.2, 2.0, 850, 1698, 1632, 1030, 7.58, 1.45},
                        {"G3", 58.3, .90, 310, 14, 1.7, 2.0, 656, 2098, 1926, 874, 7.37, 2.15},
                        {"D3", 71.2, 1.95, 51, 5, 1.2, 2.0, 741, 3144, 4696, 4049, 11.08, 7.02},
                        {"A2", 73.9, 3.61, 40, 7, .9, 2.5, 729, 2958, 4322, 3846, 14.56, 8.63},
                        {"E2", 71.6, 6.24, 57, 2, 1.2, 2.0, 428, 2030, 3470, 3544, 11.41, 9.25}};
    double worst = 0.0;
    for (const auto& row : rows) {
        CAPTURE(row.name);
        const double length = .65, f0 = std::sqrt(row.t / (row.mu * 1e-3)) / (2.0 * length);
        const double b = M_PI * M_PI * row.ei * 1e-6 / (row.t * length * length);
        const Partials bendingAlone = ringing({row.etaB * 1e-2, 0.0}, f0, b);
        const auto q = [&](int n) {
            const double bn2 = b * n * n, omega = 2.0 * M_PI * bendingAlone.frequency(n);
            // His friction and air terms weigh with the tension's share, ours with the whole: stated apart here.
            return 1.0 / ((row.etaF * 1e-5 + row.etaA / omega) / (1.0 + bn2) + bendingAlone.inverseQ(n));
        };
        for (const auto& [n, printed] : {std::pair{1, row.q1}, {5, row.q5}, {10, row.q10}, {20, row.q20}}) {
            CHECK(q(n) == Approx(printed).margin(0.51));
            worst = hitchpin::support::worse(worst, std::abs(q(n) / printed - 1.0));
        }
        CHECK(2.1988 * q(1) / bendingAlone.frequency(1) == Approx(row.t60First).margin(0.006));
        CHECK(2.1988 * q(10) / bendingAlone.frequency(10) == Approx(row.t60Tenth).margin(0.006));
    }
    std::cout << "Woodhouse's Q: worst " << 100.0 * worst << " % from the printed whole numbers\n";
}

// The common law ∝ f² (Valette and Cuesta: 4π²μEI·δ·f²/T²) is the limit for small Bn².
TEST_CASE("Bending loss follows the square of frequency while stiffness is small, and saturates", "[string]") {
    const double b = 1e-5, delta = 3e-3;
    const Partials partials = ringing({delta, 0.0}, 100.0, b);
    for (int n = 1; n <= 10; ++n)
        CHECK(partials.inverseQ(n) == Approx(delta * b * n * n).epsilon(2e-3));
    CHECK(ringing({delta, 0.0}, 100.0, 0.05).inverseQ(60) < delta);
    CHECK(ringing({delta, 0.0}, 100.0, 0.05).inverseQ(60) > 0.99 * delta);
}

TEST_CASE("A winding's loss and the core's constant add", "[string]") {
    Description d;
    d.speakingLength = 1.0;
    d.build.core = {*findBuiltInMaterial("music wire"), 0.8e-3, CoreShape::round, Measured::slack};
    Winding w;
    w.material = *findBuiltInMaterial("copper");
    w.diameter = 0.5e-3;
    const auto without = [&] { d.build.windings = {w}; return strungToTension(d, 300.0)->partials.inverseQ(3); }();
    w.loss = 7e-4;
    const auto with = [&] { d.build.windings = {w}; return strungToTension(d, 300.0)->partials.inverseQ(3); }();
    CHECK(with - without == Approx(7e-4).epsilon(1e-9));
}

// Valette and Cuesta's drag by the diameter, R = 2πη + 2πd√(πηρ_a·f) (from memory), as a force per metre and velocity:
// 1/Q = R/(2πf·μ). A winding makes the string as thick as it is outside.
// Turned red by: the string's diameter handed over as its radius.
TEST_CASE("A string at tension has the drag of its own diameter and mass", "[string]") {
    constexpr double airDensity = 1.2, viscosity = airDensity * 1.5e-5;
    Description d;
    d.speakingLength = 0.65;
    d.build.core = {*findBuiltInMaterial("music wire"), 0.254e-3, CoreShape::round, Measured::atPitch};
    d.build.core.material.bendingLoss = d.build.core.material.constantLoss = 0.0;
    for (const double windingMm : {0.0, 0.3}) {
        CAPTURE(windingMm);
        if (windingMm > 0.0) {
            Winding w;
            w.material = *findBuiltInMaterial("copper");
            w.diameter = windingMm * 1e-3;
            d.build.windings = {w};
        }
        const auto strung = strungToTension(d, 70.0);
        REQUIRE(strung);
        const double diameter = 0.254e-3 + 2e-3 * windingMm;
        for (const int n : {1, 4, 16}) {
            const double f = strung->partials.frequency(n);
            const double drag = 2.0 * M_PI * viscosity + 2.0 * M_PI * diameter * std::sqrt(M_PI * viscosity * airDensity * f);
            CHECK(strung->partials.inverseQ(n) == Approx(drag / (2.0 * M_PI * f * strung->statics.linearDensity)).epsilon(1e-9));
        }
    }
}
