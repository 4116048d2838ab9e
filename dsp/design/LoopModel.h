// A loop as a formula: ln L(e^p) anywhere in the complex plane, with its derivatives by p and by every
// constant.
#pragma once

#include "dsp/design/LoopDesign.h"

#include <complex>
#include <span>
#include <vector>

namespace hitchpin::design {

struct LoopModel {
    double straightDelay = 1.0; ///< samples of pure delay, also fractional while fitting
    double thiranDelay = 0.0;   ///< samples at low frequencies; 0: no Thiran section
    double loss = 0.0;          ///< nepers once round at every frequency: gain = e^(−loss)
    /// What the loss stays above while fitting: the gain under 1 by more than the rounding of the filters, and far
    /// below the first partial nothing left that rings for ever.
    double leastLoss = 1e-12;
    std::vector<AllpassSection> sections;
    std::vector<LossShelf> shelves;

    double delay() const noexcept { return straightDelay + thiranDelay; }
};

/// The constants that a fit moves, in this order. All but the delay as logarithms, which keeps every section
/// stable and every shelf passive:
/// delay (Thiran's where there is one, else the straight one) · ln c0, ln c1 of each section · ln loss ·
/// ln corner, ln depth of each shelf.
std::size_t constantCount(const LoopModel&);
std::size_t firstLossConstant(const LoopModel&);
std::vector<double> constantsOf(const LoopModel&);
/// False, and the model left half changed, where the delay is negative or a constant is out of all bounds.
bool setConstants(LoopModel&, std::span<const double>, std::size_t first = 0);

/// ln L(e^p) without the turn, in its two parts: line, Thiran and sections; gain and shelves. Imaginary parts
/// are followed continuously from 0 at p = 0. `s` = tanh(p/2). `byConstant` may be empty; else it receives
/// the derivatives by the constants of that part: the first firstLossConstant() ones, and the others.
std::complex<double> logLine(const LoopModel&, std::complex<double> p, std::complex<double> s,
                             std::span<std::complex<double>> byConstant = {});
std::complex<double> logLoss(const LoopModel&, std::complex<double> s,
                             std::span<std::complex<double>> byConstant = {});

/// d ln L(e^p)/dp.
std::complex<double> logLoopSlope(const LoopModel&, std::complex<double> s);

/// The pole of the loop near `start`: ln L(e^p) + j2π·turns = 0, by Newton. NaN where it does not converge.
std::complex<double> loopPole(const LoopModel&, double turns, std::complex<double> start);

/// One shelf's loss on the unit circle, ready to be asked at many frequencies.
class ShelfLoss {
public:
    explicit ShelfLoss(const LossShelf&) noexcept;

    /// `excess` is 1/|H|² − 1, so that several shelves may share one logarithm: −ln|H| = ½·ln(1 + excess), of which
    /// the others are the derivatives by ln corner and ln depth.
    struct At {
        double excess, byCorner, byDepth;
    };
    /// At x² = tan²(ω/2).
    At at(double x2) const noexcept;

private:
    bool high_, steep_;
    double overCorner2_, order_, g_, lost_, depth_; ///< g = γ^2m, lost = 1 − g
};

/// −ln|L| on the unit circle at the angle ω.
double circleLoss(const LoopModel&, double omega);

/// From formula to filters and back. The model must have a Thiran section and a whole straight delay.
LoopDesign designOf(const LoopModel&);
LoopModel modelOf(const LoopDesign&);

/// Largest |L| on the unit circle, over a grid that is dense at low frequencies.
double peakGain(const LoopDesign&);

} // namespace hitchpin::design
