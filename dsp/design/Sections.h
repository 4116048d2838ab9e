// The filters of a loop as numbers to run: from a section's two constants to the coefficients of the forms
// that an engine uses. Plain functions, no state, any thread.
#pragma once

#include "dsp/design/LoopDesign.h"

#include <cmath>
#include <numbers>

namespace hitchpin::design {

/// (a2 + a1·z⁻¹ + z⁻²)/(1 + a1·z⁻¹ + a2·z⁻²)
struct DirectForm {
    double a1;
    double a2;
};

/// The same allpass as a normalised ladder: two plane rotations, k = sin and q = cos of their angles, so each
/// step keeps the sum of squares, whatever the coefficients do meanwhile. One step, x in and y out:
///     w  = q2·x − k2·m2        y  = k2·x + q2·m2
///     v  = q1·w − k1·m1        m2 = k1·w + q1·m1        m1 = v
/// Energy: x² + m1² + m2² before equals y² + m1² + m2² after.
struct LadderForm {
    double k1;
    double q1;
    double k2;
    double q2;
};

/// Bilinear map s = (1−z⁻¹)/(1+z⁻¹) of (s²−c1·s+c0)/(s²+c1·s+c0).
constexpr DirectForm directForm(const AllpassSection& section) noexcept {
    const double scale = 1.0 + section.c1 + section.c0;
    return {2.0 * (section.c0 - 1.0) / scale, (1.0 - section.c1 + section.c0) / scale};
}

/// Gray and Markel (1975) reflection coefficients. The cosines are written out, since √(1−k²) cancels where a
/// pole lies near the circle.
inline LadderForm ladderForm(const AllpassSection& section) noexcept {
    const double c0 = section.c0, c1 = section.c1, scale = 1.0 + c1 + c0;
    return {(c0 - 1.0) / (1.0 + c0), 2.0 * std::sqrt(c0) / (1.0 + c0), (1.0 - c1 + c0) / scale,
            2.0 * std::sqrt(c1 * (1.0 + c0)) / scale};
}

/// A shelf of first order as a state: y = d·x + c·m, m' = b·x + a·m, scaled so that y² + m'² ≤ x² + m² always.
/// (Bounded-real lemma for one state: scaled so that |b| = |c|, the weights of a contraction allow it whenever any
/// scale does.)
struct ShelfForm {
    double a, b, c, d;
};

/// A shelf of second order as two states, y = d·x + c·m, m' = b·x + A·m, with y² + |m'|² ≤ x² + |m|² always.
struct SteepShelfForm {
    double a11, a12, a21, a22, b1, b2, c1, c2, d;
};

/// A low shelf is a high one of corner 1/w heard in the mirror z → −z.
inline ShelfForm shelfForm(const LossShelf& shelf) noexcept {
    const bool high = shelf.loses == LossShelf::Loses::high;
    const double w = high ? shelf.corner : 1.0 / shelf.corner, mirror = high ? 1.0 : -1.0;
    const double gamma = std::exp(-shelf.depth), lost = -std::expm1(-shelf.depth);
    // Bilinear map of (w + γs)/(w + s): b·c = 2w(1 − γ)/(1 + w)².
    const double both = std::sqrt(2.0 * w * lost) / (1.0 + w);
    return {mirror * (1.0 - w) / (1.0 + w), mirror * both, both, (w + gamma) / (1.0 + w)};
}

/// H and G = √(1−γ⁴)·s²/D₂(w, s) keep |H|² + |G|² = 1 together: one lossless filter of two outputs. As an analogue
/// network ẋ = A·x + B·u, (H, G) = C·x + D·u with A + Aᵀ = −CᵀC and B = −CᵀD, its |x|² grows by exactly u² − H² − G².
/// The trapezoidal rule, m' − m = √2·(A·ξ + B·u), ξ = (m' + m)/√2, is the bilinear map and keeps that to the letter;
/// G is not computed, and what it would have taken is the loss.
/// With D = (γ², g), g = √(1−γ⁴), and axes such that B = (b, 0): C along D is (−b, 0), across it (p, q), where
/// b² = √2·w(1−γ³), q² = √2·w(1−γ²)/(1−γ³), p·b = −√2·w·γ·g, from comparing coefficients of (H, G).
inline SteepShelfForm steepShelfForm(const LossShelf& shelf) noexcept {
    const bool high = shelf.loses == LossShelf::Loses::high;
    const double w = high ? shelf.corner : 1.0 / shelf.corner, mirror = high ? 1.0 : -1.0;
    const double g1 = std::exp(-shelf.depth), g2 = g1 * g1;
    const double lost2 = -std::expm1(-2.0 * shelf.depth), lost3 = -std::expm1(-3.0 * shelf.depth);
    const double g = std::sqrt(-std::expm1(-4.0 * shelf.depth)), r = std::numbers::sqrt2 * w;
    const double b = std::sqrt(r * lost3), q = std::sqrt(r * lost2 / lost3), p = -r * g1 * g / b;
    // A = −CᵀC/2 + a turn, of which b·(A₂₁·q − p·A₂₂) = −g·w² says how much.
    const double a11 = -0.5 * (b * b + p * p), a22 = -0.5 * q * q;
    const double a21 = (p * a22 - g * w * w / b) / q, a12 = -p * q - a21;
    // C of H alone: γ² times what is along D, less g times what is across.
    const double c1 = -g2 * b - g * p, c2 = -g * q;
    // ξ = (1 − A)⁻¹(√2·m + B·u).
    const double determinant = (1.0 - a11) * (1.0 - a22) - a12 * a21;
    const double i11 = (1.0 - a22) / determinant, i12 = a12 / determinant;
    const double i21 = a21 / determinant, i22 = (1.0 - a11) / determinant;
    const double root = std::numbers::sqrt2;
    return {mirror * (2.0 * i11 - 1.0), mirror * 2.0 * i12,         mirror * 2.0 * i21,
            mirror * (2.0 * i22 - 1.0), mirror * root * i11 * b,    mirror * root * i21 * b,
            root * (c1 * i11 + c2 * i21), root * (c1 * i12 + c2 * i22), g2 + (c1 * i11 + c2 * i21) * b};
}

/// Thiran's first-order allpass (a + z⁻¹)/(1 + a·z⁻¹): a for a delay of `samples` at low frequencies, and
/// back. Stable for samples > 0; best kept within 0.5…1.5.
constexpr double thiranCoefficient(double samples) noexcept {
    return (1.0 - samples) / (1.0 + samples);
}
constexpr double thiranDelay(double coefficient) noexcept {
    return (1.0 - coefficient) / (1.0 + coefficient);
}

} // namespace hitchpin::design
