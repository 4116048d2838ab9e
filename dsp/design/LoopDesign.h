// The designed loop of one string in one plane: plain, immutable numbers that the engine runs.
#pragma once

#include <vector>

namespace hitchpin::design {

/// Second-order allpass (s²−c1·s+c0)/(s²+c1·s+c0) with s = (1−z⁻¹)/(1+z⁻¹); stable for every c0, c1 > 0.
struct AllpassSection {
    double c0;
    double c1;
};

/// A shelf that loses what lies on one side of its corner, of order m = 1 or 2 (Butterworth). With
/// s = (1−z⁻¹)/(1+z⁻¹), D₁(w, s) = w + s, D₂(w, s) = w² + √2·w·s + s² and γ = e^(−depth):
/// high: H = D(w, γs)/D(w, s)   low: H = D(γw, s)/D(w, s).
/// |H|² = (w^2m + γ^2m·x^2m)/(w^2m + x^2m) at s = jx (high; low alike with γ at w): never over 1, by construction.
/// The loss grows from nothing as x^2m, and at most by m·depth nepers in all.
struct LossShelf {
    enum class Loses { high, low } loses = Loses::high;
    int order = 1;
    double corner = 1.0; ///< w = tan(ω/2)
    double depth = 0.1;  ///< nepers per order
};

/// How true a loop is, found from the poles of the loop itself (Newton on 1 − L(z) = 0).
struct LoopAccuracy {
    struct PartialError {
        int number;
        double targetHz;
        double cents;    ///< sounding against target
        double t60Ratio; ///< sounding over target
    };
    std::vector<PartialError> partials;
    double worstCents = 0.0;    ///< over the covered partials
    double meanCents = 0.0;     ///< root mean square over the covered partials
    double worstT60Error = 0.0; ///< |ratio − 1| over the covered partials up to 6 kHz
    double coverageHz = 0.0;    ///< up to which the design was made to be true
    int coveragePartial = 0;
    double peakLoopGain = 0.0; ///< over a dense grid of frequencies
};

/// L(z) = turn · gain · ∏shelves · ∏sections · thiran · z^(−delay): once round the string. `turn` is +1
/// between two ends of the same kind and −1 where one of them is free.
struct LoopDesign {
    double sampleRate = 0.0; ///< Hz
    double firstPartialHz = 0.0;
    double turn = 1.0;
    int delay = 1;       ///< whole samples, at least 1
    double thiran = 0.0; ///< a in (a + z⁻¹)/(1 + a·z⁻¹)
    double gain = 1.0;   ///< under 1
    std::vector<LossShelf> shelves;
    std::vector<AllpassSection> sections;
    LoopAccuracy accuracy;
};

} // namespace hitchpin::design
