// One string of the document as physics, and the strings between two.
#pragma once

#include "Source/document/Instrument.h"
#include "dsp/string/Strung.h"
#include "dsp/tuning/Tuning.h"

namespace hitchpin::document {

/// Enough to find a string's pitch and stiffness, where its partials are not asked for.
inline constexpr int fewPartials = 2;

/// The file's own material or a built-in one; nullopt where the name is not known.
std::optional<string::Material> materialNamed(const std::string& name, const Instrument&);

/// The pitch of a course or string whose pitch is given by note or pitch_hz, cents included.
double pitchOf(const Course&, const tuning::Tuning&);

/// The string brought to its pitch or its tension. `course` is one string's (see stringOf).
Result<string::Strung> tuned(const Course& course, double detuneCents, const tuning::Tuning&, const Instrument&,
                             int partialCount = string::defaultPartialCount);

/// Share of the speaking length from the bridge at which the course is set going.
double pluckRatioOf(const Course&, With);

/// A course a share `t` of the way from `low` to `high`: lengths and diameters geometric, ratios linear. Where the
/// two are built differently, the nearer one's build on the length in between. Its pitch is left to the caller.
Course strungBetween(const Course& low, const Course& high, double t, const Instrument&);

} // namespace hitchpin::document
