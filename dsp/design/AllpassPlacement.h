// Where a fit of the dispersion begins.
#pragma once

#include "dsp/design/LoopModel.h"
#include "dsp/string/Partials.h"

namespace hitchpin::design {

/// Sets the model's sections and its straight delay: the string's group delay above a constant is cut into
/// areas of 2π, one a section (Abel and Smith, "Robust design of very high-order allpass dispersion filters",
/// 2006). `flatness` is β there, about 0.5…0.7. They are laid over the partials up to the one that needs `reach` times
/// their number. False where no delay would be left.
/// For a part of the way round the string: `share` of its phase, and `lead` samples of delay more than it has.
bool placeSections(LoopModel&, const string::Partials&, double sampleRate, int coveredPartial, int sections,
                   double reach, double flatness, double share = 1.0, double lead = 0.0);

} // namespace hitchpin::design
