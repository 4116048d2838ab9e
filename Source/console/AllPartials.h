// The whole-instrument check: every coupled partial of an instrument, predicted and found in its sound.
#pragma once

#include "Source/console/Command.h"
#include "dsp/design/InstrumentDescription.h"
#include "dsp/design/MakeLoop.h"

namespace hitchpin::console {

/// Prints them, and what was worst. Fails where one that can be measured is off by more than the check allows.
Exit printAllPartials(design::InstrumentDescription, design::Quality);

} // namespace hitchpin::console
