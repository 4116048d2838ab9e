// Moves a loop's constants towards what it has to meet.
#pragma once

#include "dsp/design/LoopModel.h"
#include "dsp/design/LoopTargets.h"

namespace hitchpin::design {

/// One sample for the line and half a one for Thiran's section.
inline constexpr double leastDelay = 1.5;
/// Thiran's section is most nearly a plain delay around one sample. A fit that leads further away uses it as
/// one more dispersion section and gets lost.
inline constexpr double shortestThiran = 0.5, longestThiran = 1.5;
/// In a fit of phase and loss together, so many per cent of T60 weigh as much as a cent.
inline constexpr double percentPerCent = 3.0;

/// What a loop has to meet.
struct LoopTargets {
    std::vector<LoopTarget> phase;
    std::vector<LoopTarget> loss;
    /// Samples that the model is allowed to be later than the targets say, so that it has room for its filters.
    double lead = 0.0;
};

/// Which constants move, and towards which targets. `sections`: the phase with the delay held.
enum class Fitted { sections, phase, loss, both };

/// Least squares at the damped poles: phase in cents, loss in per cent. Ends early below `enough`. Returns
/// the sum of squares, infinity where the start is not allowed.
double fit(LoopModel&, const LoopTargets&, Fitted, int iterations, double enough = 0.0);

/// From any delay to whole samples and Thiran's section.
void splitDelay(LoopModel&);

/// Sets the delay so that the loop's own pole has exactly the frequency of the target. False where that leads
/// to no loop. The model must have a Thiran section.
bool tuneExactly(LoopModel&, const LoopTarget&);

/// The same loop with everything in it moved to `ratio` times its frequency; the fraction of the delay stays
/// near where it was.
LoopModel scaled(LoopModel, double ratio);

/// Beyond the covered partials the loop goes its own way. Moves the loss targets there to where its poles lie, with
/// what has to be lost on a round as long as it is there.
void followBeyond(const LoopModel&, std::vector<LoopTarget>& loss, double sampleRate);

/// Cents by which the loop's phase misses each phase target, and shares by which its loss misses each loss target.
std::vector<double> phaseMisses(const LoopModel&, const std::vector<LoopTarget>&);
std::vector<double> lossMisses(const LoopModel&, const std::vector<LoopTarget>&);

} // namespace hitchpin::design
