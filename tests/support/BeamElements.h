// An oracle that shares nothing with the closed forms: the stiff string under tension as Hermite beam elements.
#pragma once

#include "dsp/string/Partials.h"

#include <Eigen/Core>

#include <algorithm>
#include <array>
#include <cmath>
#include <functional>
#include <numbers>
#include <vector>

namespace hitchpin::support {

/// Stiffness and mass of cubic beam elements with tension (consistent matrices: Przemieniecki, Theory of Matrix
/// Structural Analysis; from memory) for T = μ = L = 1. At each border, from the nut at 0 to the bridge at 1, a
/// displacement and a slope. `free`: those that the ends leave free.
struct BeamSystem {
    Eigen::MatrixXd k, m;
    std::vector<int> free;

    template <class Matrix>
    Eigen::MatrixXd freePart(const Matrix& of) const {
        return of(free, free);
    }
};

inline BeamSystem beamSystem(double inharmonicity, string::Ends ends, const std::vector<double>& borders,
                             const std::function<double(double)>& mass = [](double) { return 1.0; }) {
    const int elements = static_cast<int>(borders.size()) - 1, size = 2 * (elements + 1);
    const double epsilon = inharmonicity / (std::numbers::pi * std::numbers::pi); // EI/(TL²)
    Eigen::MatrixXd k = Eigen::MatrixXd::Zero(size, size), m = k;
    for (int e = 0; e < elements; ++e) {
        const double h = borders[static_cast<std::size_t>(e + 1)] - borders[static_cast<std::size_t>(e)], h2 = h * h;
        const double rho = mass(0.5 * (borders[static_cast<std::size_t>(e)] + borders[static_cast<std::size_t>(e + 1)]));
        Eigen::Matrix4d bending, tension, inertia;
        bending << 12, 6 * h, -12, 6 * h, 6 * h, 4 * h2, -6 * h, 2 * h2, -12, -6 * h, 12, -6 * h, 6 * h, 2 * h2, -6 * h, 4 * h2;
        tension << 36, 3 * h, -36, 3 * h, 3 * h, 4 * h2, -3 * h, -h2, -36, -3 * h, 36, -3 * h, 3 * h, -h2, -3 * h, 4 * h2;
        inertia << 156, 22 * h, 54, -13 * h, 22 * h, 4 * h2, 13 * h, -3 * h2, 54, 13 * h, 156, -22 * h, -13 * h, -3 * h2, -22 * h, 4 * h2;
        k.block<4, 4>(2 * e, 2 * e) += epsilon / (h2 * h) * bending + tension / (30.0 * h);
        m.block<4, 4>(2 * e, 2 * e) += rho * h / 420.0 * inertia;
    }
    BeamSystem system{k, m, {}};
    for (int i = 0; i < size; ++i) {
        const bool nut = i < 2, bridge = i >= size - 2;
        const string::End end = nut ? ends.nut : ends.bridge;
        const bool displacement = i % 2 == 0;
        const bool held = (nut || bridge) && ((displacement && end != string::End::free) ||
                                              (!displacement && end == string::End::clamped));
        if (!held)
            system.free.push_back(i);
    }
    return system;
}

/// Symmetric, with no entry further than three from the diagonal: at(i, d) is entry (i, i + d).
class Banded {
public:
    explicit Banded(int size) : rows(static_cast<std::size_t>(size)) {}
    int size() const { return static_cast<int>(rows.size()); }
    double& at(int i, int d) { return rows[static_cast<std::size_t>(i)][static_cast<std::size_t>(d)]; }
    double at(int i, int d) const { return rows[static_cast<std::size_t>(i)][static_cast<std::size_t>(d)]; }

private:
    std::vector<std::array<double, 4>> rows;
};

/// How many eigenvalues of K·x = λ·M·x lie below λ: as many as K − λM has negative pivots (Sylvester's law of inertia;
/// Parlett, The Symmetric Eigenvalue Problem).
inline int eigenvaluesBelow(double lambda, const Banded& k, const Banded& m) {
    Banded left(k.size());
    int negative = 0;
    for (int i = 0; i < k.size(); ++i)
        for (int d = 0; d < 4; ++d)
            left.at(i, d) = k.at(i, d) - lambda * m.at(i, d);
    for (int i = 0; i < k.size(); ++i) {
        const double pivot = left.at(i, 0);
        negative += pivot < 0.0;
        for (int a = 1; a < std::min(4, k.size() - i); ++a)
            for (int b = a; b < 4; ++b)
                left.at(i + a, b - a) -= left.at(i, a) / pivot * left.at(i, b);
    }
    return negative;
}

/// f_1…f_count over F0 = √(T/μ)/2L, from generalised eigenvalues. `mass` is the linear density at
/// x in 0…1 over that of F0, constant within an element: put element borders on its steps. The frequency of a beam comes
/// out too high by about (kh)⁴/1440 of itself, k the wave number and h the element.
inline std::vector<double> beamRatios(double inharmonicity, string::Ends ends, int count,
                                      const std::vector<double>& borders,
                                      const std::function<double(double)>& mass = [](double) { return 1.0; }) {
    const BeamSystem system = beamSystem(inharmonicity, ends, borders, mass);
    const int size = static_cast<int>(system.free.size());
    Banded k(size), m(size);
    for (int i = 0; i < size; ++i)
        for (int d = 0; d < std::min(4, size - i); ++d) {
            const int row = system.free[static_cast<std::size_t>(i)], column = system.free[static_cast<std::size_t>(i + d)];
            k.at(i, d) = system.k(row, column);
            m.at(i, d) = system.m(row, column);
        }
    // By halving, until nothing lies between.
    const auto below = [&](double ratio) {
        return eigenvaluesBelow(ratio * ratio * std::numbers::pi * std::numbers::pi, k, m);
    };
    std::vector<double> ratios;
    // Both ends free: the string may be elsewhere as a whole.
    const int first = ends.nut == string::End::free && ends.bridge == string::End::free ? 1 : 0;
    double low = 1e-3; // above that one
    for (int i = first; i < first + count; ++i) {
        double high = low + 1.0;
        while (below(high) <= i)
            high += 1.0;
        for (int halving = 0; halving < 52; ++halving) {
            const double middle = 0.5 * (low + high);
            (below(middle) <= i ? low : high) = middle;
        }
        ratios.push_back(low = high);
    }
    return ratios;
}

/// `elements` over the middle, and finer towards both ends, where clamped and free strings bend over a length of
/// √ε: from a quarter of that up to even elements.
inline std::vector<double> bordersForEnds(double inharmonicity, int elements) {
    const double even = 1.0 / elements, finest = std::min(even, 0.25 * std::sqrt(inharmonicity) / std::numbers::pi);
    std::vector<double> half{0.0};
    for (double h = finest; half.back() < 0.5; h = std::min(even, half.back() > 20.0 * finest ? 1.3 * h : h))
        half.push_back(half.back() + h);
    const double scale = 0.5 / half.back();
    std::vector<double> borders;
    for (const double x : half)
        borders.push_back(x * scale);
    for (std::size_t i = half.size() - 1; i-- > 0;)
        borders.push_back(1.0 - half[i] * scale);
    return borders;
}

} // namespace hitchpin::support
