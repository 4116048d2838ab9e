#include "dsp/string/Partials.h"

#include "dsp/string/FrequencyDeterminant.h"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace hitchpin::string {
namespace {

constexpr double pi = std::numbers::pi;
constexpr double airDensity = 1.2;            // kg/m³ at 20 °C
constexpr double airKinematicViscosity = 1.5e-5; // m²/s at 20 °C

/// The law of the hinged string counts n where both ends hold or both are free, n − ½ where one is free.
double lawIndex(const Ends& ends, double n) { return ends.oneFree() ? n - 0.5 : n; }

/// f_n = n·F0·√(1 + B·n²), hinged stiff string. Fletcher, JASA 36:203 (1964).
double hingedLaw(double f0, double b, double n) { return n * f0 * std::sqrt(1.0 + b * n * n); }
double hingedSlope(double f0, double b, double n) {
    return f0 * (1.0 + 2.0 * b * n * n) / std::sqrt(1.0 + b * n * n);
}

/// 1/Q of a cylinder of radius r that moves sideways in still air, Stokes' drag for M = (r/2)·√(2πf/ν):
/// 1/Q = (ρ_air/ρ_string)·(2√2·M + 1)/(2·M²), with ρ_string = μ/(πr²). Within 3 % of the exact Bessel form for
/// M over 0.7 (a 0.25 mm string at 330 Hz) and better for thicker ones.
double airInverseQ(double radius, double linearDensity, double frequency) {
    const double m = 0.5 * radius * std::sqrt(2.0 * pi * frequency / airKinematicViscosity);
    const double displaced = airDensity * pi * radius * radius / linearDensity;
    return displaced * (2.0 * std::numbers::sqrt2 * m + 1.0) / (2.0 * m * m);
}

} // namespace

Partials::Partials(double harmonicF0, double inharmonicity, Ends ends, Losses losses, int count)
    : harmonicF0_(harmonicF0), inharmonicity_(inharmonicity), ends_(ends), losses_(losses) {
    const bool hingedLawIsExact = ends.nut == End::hinged && ends.bridge == End::hinged;
    if (!hingedLawIsExact)
        setTable(partialRatios(inharmonicity, ends, count));
}

Partials::Partials(std::vector<double> frequencies, double harmonicF0, double inharmonicity, Ends ends, Losses losses)
    : harmonicF0_(harmonicF0), inharmonicity_(inharmonicity), ends_(ends), losses_(losses) {
    for (double& f : frequencies)
        f /= harmonicF0;
    setTable(std::move(frequencies));
}

void Partials::setTable(std::vector<double> overF0) {
    ratio_ = std::move(overF0);
    const int count = static_cast<int>(ratio_.size());
    for (int n = 1; n <= count; ++n)
        ratio_[static_cast<std::size_t>(n - 1)] /= hingedLaw(1.0, inharmonicity_, lawIndex(ends_, n));
    // Central differences, one-sided second order at the ends: a C1 curve through the exact values.
    ratioSlope_.assign(ratio_.size(), 0.0);
    const auto r = [&](int i) { return ratio_[static_cast<std::size_t>(i)]; };
    for (int i = 0; i < count && count > 2; ++i) {
        double& slope = ratioSlope_[static_cast<std::size_t>(i)];
        if (i == 0)
            slope = -1.5 * r(0) + 2.0 * r(1) - 0.5 * r(2);
        else if (i == count - 1)
            slope = 1.5 * r(i) - 2.0 * r(i - 1) + 0.5 * r(i - 2);
        else
            slope = 0.5 * (r(i + 1) - r(i - 1));
    }
}

Partials::RatioAt Partials::ratioAt(double n) const {
    if (ratio_.empty())
        return {1.0, 0.0};
    const double last = static_cast<double>(ratio_.size());
    if (n >= last)
        return {ratio_.back(), 0.0};
    if (n <= 1.0)
        return {ratio_.front() + (n - 1.0) * ratioSlope_.front(), ratioSlope_.front()};
    const auto i = static_cast<std::size_t>(n) - 1;
    const double t = n - std::floor(n), r0 = ratio_[i], r1 = ratio_[i + 1], s0 = ratioSlope_[i], s1 = ratioSlope_[i + 1];
    const double d = r1 - r0, c2 = 3.0 * d - 2.0 * s0 - s1, c3 = s0 + s1 - 2.0 * d; // cubic Hermite
    return {r0 + t * (s0 + t * (c2 + t * c3)), s0 + t * (2.0 * c2 + 3.0 * t * c3)};
}

double Partials::frequency(double n) const {
    return hingedLaw(harmonicF0_, inharmonicity_, lawIndex(ends_, n)) * ratioAt(n).value;
}

double Partials::slope(double n) const {
    const double index = lawIndex(ends_, n);
    const auto [value, derivative] = ratioAt(n);
    return hingedSlope(harmonicF0_, inharmonicity_, index) * value +
           hingedLaw(harmonicF0_, inharmonicity_, index) * derivative;
}

/// 1/Q = air + δ·Bn²/(1+Bn²) + constant. The middle term is exact for a hinged string of complex modulus E(1 + jδ),
/// δ ≪ 1: Bn²/(1+Bn²) is the share of bending in the potential energy (equivalent to the form of Woodhouse,
/// Acta Acustica 90:928 (2004)). For other ends it leaves out the bending at the ends themselves.
double Partials::inverseQ(double n) const {
    const double index = lawIndex(ends_, n), bn2 = inharmonicity_ * index * index;
    double sum = losses_.constantLoss + losses_.bendingLoss * bn2 / (1.0 + bn2);
    if (losses_.outerRadius > 0.0)
        sum += airInverseQ(losses_.outerRadius, losses_.linearDensity, frequency(n));
    return sum;
}

double Partials::decayRate(double n) const { return pi * frequency(n) * inverseQ(n); }

double Partials::t60(double n) const { return std::log(1000.0) / decayRate(n); }

} // namespace hitchpin::string
