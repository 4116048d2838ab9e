// The filters of a loop as numbers to run: from a section's two constants to the coefficients of the forms
// that an engine uses. Plain functions, no state, any thread.
#pragma once

#include "dsp/design/LoopDesign.h"

#include <cmath>

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

/// Thiran's first-order allpass (a + z⁻¹)/(1 + a·z⁻¹): a for a delay of `samples` at low frequencies, and
/// back. Stable for samples > 0; best kept within 0.5…1.5.
constexpr double thiranCoefficient(double samples) noexcept {
    return (1.0 - samples) / (1.0 + samples);
}
constexpr double thiranDelay(double coefficient) noexcept {
    return (1.0 - coefficient) / (1.0 + coefficient);
}

} // namespace hitchpin::design
