// Shelves for the loss of a loop.
#pragma once

#include "dsp/design/LoopModel.h"
#include "dsp/design/LoopTargets.h"

namespace hitchpin::design {

/// How much a loss target matters: fully up to 6 kHz, less above, and least beyond the covered partials. Its weight in
/// a fit is that times its own.
double lossImportance(const LoopTarget&);
double lossWeight(const LoopTarget&);

/// Sets the model's loss and as few shelves (at most six) as meet the targets in ratio on the unit circle, within
/// `goodPercent` at worst by their weights: greedy, each new shelf the best of several corners and kinds, all refined
/// together. Sums of staggered shelves follow any loss that grows less than the fourth power of frequency.
void fitLoss(LoopModel&, const std::vector<LoopTarget>&, double goodPercent);

} // namespace hitchpin::design
