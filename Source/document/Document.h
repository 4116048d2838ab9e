// Instrument files: read, validate, write; and what they describe, in SI, for everything below.
#pragma once

#include "Source/document/Instrument.h"
#include "dsp/base/Result.h"
#include "dsp/design/InstrumentDescription.h"
#include "dsp/playing/Player.h"

#include <juce_core/juce_core.h>

#include <string>
#include <vector>

namespace hitchpin::document {

/// One thing wrong: "courses[2].speaking_length_mm = -300 mm: must be over 0 and at most 10000 mm".
struct Problem {
    std::string path;
    std::string message; ///< whole, path included
};
using Problems = std::vector<Problem>;

/// All problems at once, never just the first.
Result<Instrument, Problems> parse(const juce::String& json);
Result<Instrument, Problems> load(const juce::File&);

/// Parsing this gives an equal instrument.
juce::String toJson(const Instrument&);

/// Written beside and renamed: the file is the old one or the new one, never half of either.
juce::Result save(const Instrument&, const juce::File&);

/// What may be turned without touching the document. Neutral by default; they act after tuning.
struct Adjustments {
    double tensionFactor = 1.0;      ///< at held length: pitch follows
    double lengthFactor = 1.0;       ///< at held tension: pitch follows
    double temperatureOffsetK = 0.0; ///< added to the climate's temperature
    double pitchOffsetCents = 0.0;   ///< retunes by tension
    double pluckPointOffset = 0.0;   ///< added to every pluck ratio; the result is kept within playing::pluckable
    bool operator==(const Adjustments&) const = default;
};

/// An instrument as physics: what schedule, sound, window and plug-in all read.
struct Described {
    design::InstrumentDescription instrument;
    playing::Rules rules;
    std::vector<std::string> notHeardYet; ///< what the file says and the sound does not follow yet, a sentence each
};

/// @param partialCount how many partials of a string are solved where there is no closed form (windings with bare
/// ends): what the sound needs by default; a schedule of a thousand courses asks for fewer.
Result<Described, Problems> describe(const Instrument&, const Adjustments& = {},
                                     int partialCount = string::defaultPartialCount);

} // namespace hitchpin::document
