// Shelves for the loss of a loop.
#pragma once

#include "dsp/design/LoopModel.h"
#include "dsp/design/LoopTargets.h"

namespace hitchpin::design {

/// How much a loss target counts: fully up to 6 kHz, less above, and least beyond the covered partials.
double lossWeight(const LoopTarget&);

/// Sets the model's loss and up to `shelfCount` shelves so that −ln|H| on the unit circle meets the targets
/// in ratio: greedy, each new shelf the best of several corners of both kinds, all refined together.
void fitLoss(LoopModel&, const std::vector<LoopTarget>&, int shelfCount);

} // namespace hitchpin::design
