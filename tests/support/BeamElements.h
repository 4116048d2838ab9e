// An oracle that shares nothing with the closed forms: the stiff string under tension as Hermite beam elements.
#pragma once

#include "dsp/string/Partials.h"

#include <algorithm>
#include <array>
#include <cmath>
#include <functional>
#include <numbers>
#include <stdexcept>
#include <vector>

namespace hitchpin::support {

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

/// f_1…f_count over F0 = √(T/μ)/2L, from generalised eigenvalues of cubic beam elements with tension (consistent
/// matrices: Przemieniecki, Theory of Matrix Structural Analysis; from memory). `mass` is the linear density at
/// x in 0…1 over that of F0, constant within an element: put element borders on its steps. The frequency of a beam comes
/// out too high by about (kh)⁴/1440 of itself, k the wave number and h the element.
inline std::vector<double> beamRatios(double inharmonicity, string::Ends ends, int count,
                                      const std::vector<double>& borders,
                                      const std::function<double(double)>& mass = [](double) { return 1.0; }) {
    // Displacement and slope of each node, less those the ends hold at zero.
    const int elements = static_cast<int>(borders.size()) - 1, all = 2 * (elements + 1);
    std::vector<int> place;
    int size = 0;
    for (int i = 0; i < all; ++i) {
        const bool nut = i < 2, bridge = i >= all - 2, displacement = i % 2 == 0;
        const string::End end = nut ? ends.nut : ends.bridge;
        const bool held = (nut || bridge) && (displacement ? end != string::End::free : end == string::End::clamped);
        place.push_back(held ? -1 : size++);
    }
    const double epsilon = inharmonicity / (std::numbers::pi * std::numbers::pi); // EI/(TL²)
    Banded k(size), m(size);
    for (int e = 0; e < elements; ++e) {
        const double x = borders[static_cast<std::size_t>(e)], h = borders[static_cast<std::size_t>(e + 1)] - x, h2 = h * h;
        const double rho = mass(x + 0.5 * h);
        if (!(h > 0.0 && rho > 0.0))
            throw std::invalid_argument("beamRatios: an element without length or mass");
        // Upper triangles, row by row.
        const double bending[] = {12, 6 * h, -12, 6 * h, 4 * h2, -6 * h, 2 * h2, 12, -6 * h, 4 * h2};
        const double tension[] = {36, 3 * h, -36, 3 * h, 4 * h2, -3 * h, -h2, 36, -3 * h, 4 * h2};
        const double inertia[] = {156, 22 * h, 54, -13 * h, 4 * h2, 13 * h, -3 * h2, 156, -22 * h, 4 * h2};
        int entry = 0;
        for (int a = 0; a < 4; ++a)
            for (int b = a; b < 4; ++b, ++entry) {
                const int i = place[static_cast<std::size_t>(2 * e + a)], j = place[static_cast<std::size_t>(2 * e + b)];
                if (i < 0 || j < 0)
                    continue;
                k.at(i, j - i) += epsilon / (h2 * h) * bending[entry] + tension[entry] / (30.0 * h);
                m.at(i, j - i) += rho * h / 420.0 * inertia[entry];
            }
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
