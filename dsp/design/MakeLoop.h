// From a string's partials and a sample rate to its loop.
#pragma once

#include "dsp/base/Result.h"
#include "dsp/design/LoopDesign.h"
#include "dsp/string/Partials.h"

namespace hitchpin::design {

/// live: at most 12 allpass sections, ready at once. reference: as many as the string needs, up to 60.
enum class Quality { live, reference };

struct LoopSettings {
    double sampleRate = 48000.0;
    Quality quality = Quality::live;
};

/// Allocates; not for the audio thread. Fails, with the cause, where the string cannot be run at this rate
/// (its first partial too near half the rate).
Result<LoopDesign> makeLoop(const string::Partials&, const LoopSettings&);

/// The loop of a string a little off `neighbour`'s (the others of a unison, another fret): warm start.
Result<LoopDesign> retuneLoop(const LoopDesign& neighbour, const string::Partials&, const LoopSettings&);

} // namespace hitchpin::design
