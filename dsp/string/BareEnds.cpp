#include "dsp/string/BareEnds.h"

#include <Eigen/Eigenvalues>

#include <algorithm>
#include <cmath>
#include <numbers>

namespace hitchpin::string {
namespace {

constexpr double pi = std::numbers::pi;

} // namespace

/// Rayleigh–Ritz on sines, which are the hinged string's own modes: K = diag(i²(1 + B·i²)) in units of (2πF0)², and
/// M = 1 − what the bare ends lack. With z = K^½·a the problem is symmetric: K^−½·M·K^−½ z = (1/f²)·z. From the
/// far end sines count with the sign (−1)^(i+j). Sines beyond the wanted partials serve to bend them at the steps.
std::vector<double> steppedRatios(double inharmonicity, const MassSteps& steps, int count) {
    const int size = count + std::min(count, 48) + 24;
    Eigen::MatrixXd m(size, size);
    Eigen::VectorXd rootStiffness(size);
    for (int i = 1; i <= size; ++i)
        rootStiffness[i - 1] = i * std::sqrt(1.0 + inharmonicity * i * i);
    // What a step lacks depends on i+j and i−j alone.
    Eigen::VectorXd nut = Eigen::VectorXd::Zero(2 * size + 1), bridge = nut;
    for (int k = 0; k <= 2 * size; ++k)
        for (const auto& step : steps) {
            const auto integral = [k](double b) { return k == 0 ? b : std::sin(k * pi * b) / (k * pi); };
            nut[k] += step.lackNut * integral(step.nutShare);
            bridge[k] += step.lackBridge * integral(step.bridgeShare);
        }
    for (int j = 1; j <= size; ++j)
        for (int i = j; i <= size; ++i) {
            const double mirror = (i - j) % 2 == 0 ? 1.0 : -1.0;
            const double lack = nut[i - j] - nut[i + j] + mirror * (bridge[i - j] - bridge[i + j]);
            m(i - 1, j - 1) = ((i == j ? 1.0 : 0.0) - lack) / (rootStiffness[i - 1] * rootStiffness[j - 1]);
        }
    // In two steps: the solver's own first step brings the eigenvectors' code along, seconds of building for what is not
    // asked here.
    const Eigen::Tridiagonalization<Eigen::MatrixXd> tridiagonal(m);
    Eigen::SelfAdjointEigenSolver<Eigen::MatrixXd> solver;
    solver.computeFromTridiagonal(tridiagonal.diagonal(), tridiagonal.subDiagonal(), Eigen::EigenvaluesOnly);
    std::vector<double> ratios(static_cast<std::size_t>(count));
    for (int n = 1; n <= count; ++n) // eigenvalues rise; the lowest partial has the largest
        ratios[static_cast<std::size_t>(n - 1)] = 1.0 / std::sqrt(solver.eigenvalues()[size - n]);
    return ratios;
}

/// Least squares of (f_n/n)² = a + (a·B)·n² over the lowest twelve.
double effectiveInharmonicity(const std::vector<double>& frequencies) {
    const int count = std::min<int>(12, static_cast<int>(frequencies.size()));
    double s0 = 0.0, s1 = 0.0, s2 = 0.0, y0 = 0.0, y1 = 0.0;
    for (int n = 1; n <= count; ++n) {
        const double x = static_cast<double>(n) * n, f = frequencies[static_cast<std::size_t>(n - 1)] / n, y = f * f;
        s0 += 1.0;
        s1 += x;
        s2 += x * x;
        y0 += y;
        y1 += x * y;
    }
    const double determinant = s0 * s2 - s1 * s1;
    const double offset = (s2 * y0 - s1 * y1) / determinant, slope = (s0 * y1 - s1 * y0) / determinant;
    return std::max(0.0, slope / offset);
}

} // namespace hitchpin::string
