// How true a loop is, from its own poles.
#pragma once

#include "dsp/design/LoopModel.h"
#include "dsp/design/LoopTargets.h"

namespace hitchpin::design {

/// Worst partial of a loop that counts as true, cents.
inline constexpr double trueCents = 1.0;

/// Newton poles of the covered partials and of some beyond. A pole that is not found makes the worst error
/// infinite. Leaves the loop gain to the finished design.
LoopAccuracy measureLoop(const LoopModel&, const string::Partials&, double sampleRate, const LoopPlan&);

/// Where the sections hardly suffice the last partials may be off: then they do not count as covered.
void trimCoverage(LoopAccuracy&);

} // namespace hitchpin::design
