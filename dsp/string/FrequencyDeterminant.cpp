#include "dsp/string/FrequencyDeterminant.h"

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>
#include <utility>

namespace hitchpin::string {
namespace {

constexpr double pi = std::numbers::pi;

/// On a string of length 1 with ε = EI/(TL²): y = A·cos kx + B·sin kx + C·e^(−κx) + D·e^(−κ(1−x)), κ² = k² + 1/ε.
/// Hinged: y = y'' = 0. Clamped: y = y' = 0. Free: y'' = 0 and ε·y''' − y' = 0 (no moment, no force).
struct WaveNumbers {
    double k, kappa, epsilon;
};

WaveNumbers at(double k, double epsilon) { return {k, std::sqrt(k * k + 1.0 / epsilon), epsilon}; }

/// Far from the other end a wave sin(kx + φ) leaves this one: the decaying parts of the two ends do not meet.
double endPhase(End end, const WaveNumbers& w) {
    const double ek2 = w.epsilon * w.k * w.k;
    switch (end) {
    case End::clamped:
        return -std::atan(w.k / w.kappa);
    case End::free:
        return pi / 2.0 + std::atan(ek2 * w.k / (w.kappa * (1.0 + ek2)));
    case End::hinged:
        break;
    }
    return 0.0;
}

/// The two conditions of an end at x = 0 on (cos, sin, e^(−κx), far part); rows scaled to order one.
std::array<std::array<double, 4>, 2> conditions(End end, const WaveNumbers& w) {
    const double k = w.k, q = w.kappa, far = std::exp(-q), scale = std::max(k, q);
    const std::array<double, 4> y{1.0, 0.0, 1.0, far};
    const std::array<double, 4> slope{0.0, k / scale, -q / scale, q / scale * far};
    const double s2 = scale * scale;
    const std::array<double, 4> moment{-k * k / s2, 0.0, q * q / s2, q * q / s2 * far};
    // ε·y''' − y' over scale: for sin −k(1 + εk²), for e^(−κx) κ(1 − εκ²) = −κεk², for the far part its opposite.
    const double ek2 = w.epsilon * k * k;
    const std::array<double, 4> force{0.0, -k * (1.0 + ek2) / scale, -q * ek2 / scale, q * ek2 / scale * far};
    switch (end) {
    case End::clamped:
        return {y, slope};
    case End::free:
        return {moment, force};
    case End::hinged:
        break;
    }
    return {y, moment};
}

double determinant(std::array<std::array<double, 4>, 4> m) {
    double product = 1.0;
    for (std::size_t column = 0; column < 4; ++column) {
        std::size_t pivot = column;
        for (std::size_t row = column + 1; row < 4; ++row)
            if (std::abs(m[row][column]) > std::abs(m[pivot][column]))
                pivot = row;
        if (m[pivot][column] == 0.0)
            return 0.0;
        if (pivot != column) {
            std::swap(m[pivot], m[column]);
            product = -product;
        }
        product *= m[column][column];
        for (std::size_t row = column + 1; row < 4; ++row) {
            const double factor = m[row][column] / m[column][column];
            for (std::size_t i = column; i < 4; ++i)
                m[row][i] -= factor * m[column][i];
        }
    }
    return product;
}

/// The whole determinant. The far end's conditions are those of a near end in x' = 1 − x, with cos kx and sin kx
/// written in x' and the two decaying parts exchanged.
double frequencyDeterminant(double k, double epsilon, const Ends& ends) {
    const WaveNumbers w = at(k, epsilon);
    std::array<std::array<double, 4>, 4> m;
    const auto nut = conditions(ends.nut, w), bridge = conditions(ends.bridge, w);
    const double c = std::cos(k), s = std::sin(k);
    for (std::size_t row = 0; row < 2; ++row) {
        m[row] = nut[row];
        const auto& [fromCos, fromSin, near, far] = bridge[row];
        m[row + 2] = {c * fromCos + s * fromSin, s * fromCos - c * fromSin, far, near};
    }
    return determinant(m);
}

/// Where the ends are many decay lengths apart this is the root to rounding; otherwise it is a start.
double rootWithoutCoupling(double phase, double epsilon, const Ends& ends) {
    double k = phase - (ends.nut == End::free ? pi / 2.0 : 0.0) - (ends.bridge == End::free ? pi / 2.0 : 0.0);
    k = std::max(k, 1e-3);
    for (int i = 0; i < 60; ++i) {
        const WaveNumbers w = at(k, epsilon);
        const double next = phase - endPhase(ends.nut, w) - endPhase(ends.bridge, w);
        // The phases move slowly with k, at most by a half each: halving the step cannot swing.
        const double step = 0.5 * (next - k);
        k = std::max(k + step, 1e-6);
        if (std::abs(step) < 1e-15 * k)
            break;
    }
    return k;
}

double rootNear(double start, double epsilon, const Ends& ends) {
    double a = start, fa = frequencyDeterminant(a, epsilon, ends);
    double b = start * (1.0 + 1e-6), fb = frequencyDeterminant(b, epsilon, ends);
    for (int i = 0; i < 40 && fb != fa; ++i) { // secant
        double next = b - fb * (b - a) / (fb - fa);
        next = std::min(std::max(next, 0.8 * b), 1.2 * b);
        a = b;
        fa = fb;
        b = next;
        if (std::abs(b - a) < 2e-15 * b)
            break;
        fb = frequencyDeterminant(b, epsilon, ends);
    }
    return b;
}

} // namespace

std::vector<double> partialRatios(double inharmonicity, Ends ends, int count) {
    std::vector<double> ratios(static_cast<std::size_t>(count));
    const bool bothFree = ends.nut == End::free && ends.bridge == End::free;
    // Without stiffness a clamped end is a hinged one.
    const double epsilon = inharmonicity / (pi * pi);
    for (int n = 1; n <= count; ++n) {
        double& ratio = ratios[static_cast<std::size_t>(n - 1)];
        if (epsilon <= 0.0) {
            ratio = ends.oneFree() ? n - 0.5 : n;
            continue;
        }
        // Two free ends: the first root is the string at rest elsewhere, which is no partial.
        double k = rootWithoutCoupling(pi * (n + (bothFree ? 1 : 0)), epsilon, ends);
        if (at(k, epsilon).kappa < 40.0)
            k = rootNear(k, epsilon, ends);
        ratio = k / pi * std::sqrt(1.0 + epsilon * k * k); // ω·L/(π·c)
    }
    return ratios;
}

} // namespace hitchpin::string
