#include "dsp/design/ModeFilter.h"

#include <cmath>
#include <complex>
#include <numbers>

namespace hitchpin::design {

using Complex = std::complex<double>;

ModeFilter modeFilter(const board::Mode& mode, double sampleRate) {
    const double w = 2.0 * std::numbers::pi * mode.frequency, half = 0.5 / mode.q;
    // Both roots of s² + sω/Q + ω², real ones where Q < ½, seen through s' = tanh(s/2fs): s'² + a·s' + b.
    const Complex root = std::sqrt(Complex(half * half - 1.0));
    const Complex first = std::tanh(0.5 * w * (-half + root) / sampleRate),
                  second = std::tanh(0.5 * w * (-half - root) / sampleRate);
    const double a = -(first + second).real(), b = (first * second).real();
    // Y = g'·s'/(s'² + a·s' + b) has its peak g'/a.
    const double gain = a * mode.q / (mode.mass * w);
    const double d = 0.5 / (1.0 + a + b);
    return {d, 2.0 * std::sqrt(b), 2.0 * gain * d, 0.5 / (gain * sampleRate)};
}

ModeResponse responseOf(const ModeFilter& filter) noexcept {
    const double b = 0.25 * filter.kappa * filter.kappa;
    return {0.5 * filter.g / filter.d, 0.5 / filter.d - 1.0 - b, b};
}

} // namespace hitchpin::design
