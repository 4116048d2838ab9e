#include "dsp/base/LeastSquares.h"

#include <catch2/catch.hpp>

#include <array>
#include <cmath>
#include <limits>

using namespace hitchpin;

TEST_CASE("least squares, NIST reference data Misra1a", "[base]") {
    // Statistical Reference Datasets, nonlinear regression: y = b1·(1 − e^(−b2·x)). Data and certified values
    // from memory; that a wrong figure would not end at all ten certified digits vouches for it.
    constexpr std::array<double, 14> y{10.07, 14.73, 17.94, 23.93, 29.61, 35.18, 40.02,
                                       44.82, 50.76, 55.05, 61.01, 66.40, 75.47, 81.78};
    constexpr std::array<double, 14> x{77.6,  114.9, 141.1, 190.8, 239.9, 289.0, 332.8,
                                       378.4, 434.8, 477.3, 536.8, 593.1, 689.1, 760.0};
    const auto residuals = [&](std::span<const double> b, std::span<double> r, std::span<double> jacobian) {
        for (std::size_t i = 0; i < x.size(); ++i) {
            const double decayed = std::exp(-b[1] * x[i]);
            r[i] = b[0] * (1.0 - decayed) - y[i];
            if (!jacobian.empty()) {
                jacobian[i] = 1.0 - decayed;
                jacobian[x.size() + i] = b[0] * x[i] * decayed;
            }
        }
        return true;
    };
    for (std::vector<double> b :
         {std::vector{500.0, 0.0001}, std::vector{250.0, 0.0005}}) { // both starts of the standard
        const double left =
            minimiseSquares(residuals, b, x.size(), {.iterations = 200, .smallestImprovement = 1e-14});
        INFO("b1 " << b[0] << ", b2 " << b[1] << ", left " << left);
        CHECK(std::abs(b[0] / 2.3894212918e2 - 1.0) < 1e-6);
        CHECK(std::abs(b[1] / 5.5015643181e-4 - 1.0) < 1e-6);
        CHECK(std::abs(left / 1.2455138894e-1 - 1.0) < 1e-9);
    }
}

TEST_CASE("least squares, the curved valley of Rosenbrock", "[base]") {
    // Rosenbrock (1960): 100·(y − x²)² + (1 − x)², least at (1, 1).
    std::vector<double> at{-1.2, 1.0};
    const double left = minimiseSquares(
        [](std::span<const double> p, std::span<double> r, std::span<double> jacobian) {
            r[0] = 10.0 * (p[1] - p[0] * p[0]);
            r[1] = 1.0 - p[0];
            if (!jacobian.empty()) {
                jacobian[0] = -20.0 * p[0];
                jacobian[1] = -1.0;
                jacobian[2] = 10.0;
                jacobian[3] = 0.0;
            }
            return true;
        },
        at, 2, {.iterations = 100, .smallestImprovement = 1e-12});
    CHECK(left < 1e-20);
    CHECK(std::abs(at[0] - 1.0) < 1e-9);
    CHECK(std::abs(at[1] - 1.0) < 1e-9);
}

TEST_CASE("least squares, bounds, limits and what is not allowed", "[base]") {
    const auto square = [](std::span<const double> p, std::span<double> r, std::span<double> jacobian) {
        if (p[0] < 0.5)
            return false; // beyond here lies the minimum
        r[0] = p[0];
        if (!jacobian.empty())
            jacobian[0] = 1.0;
        return true;
    };
    std::vector<double> at{2.0};
    CHECK(minimiseSquares(square, at, 1, {.iterations = 100}) < 0.5);
    CHECK(at[0] >= 0.5); // came near the bound and never over it
    std::vector<double> outside{0.0};
    CHECK(minimiseSquares(square, outside, 1) == std::numeric_limits<double>::infinity());
    CHECK(outside[0] == 0.0);

    std::vector<double> oneStep{10.0};
    minimiseSquares(square, oneStep, 1, {.iterations = 1, .largestStep = 0.25});
    CHECK(std::abs(oneStep[0] - 9.75) < 1e-12);

    std::vector<double> satisfied{1.0};
    minimiseSquares(square, satisfied, 1, {.goodCost = 2.0});
    CHECK(satisfied[0] == 1.0);

    std::vector<double> none;
    CHECK(minimiseSquares([](auto, std::span<double> r, auto) { return r[0] = 3.0, true; }, none, 1) == 9.0);
}
