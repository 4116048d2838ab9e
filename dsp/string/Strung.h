// A string at tension: from any sufficient set of {pitch, length, build, tension} everything else. SI units.
#pragma once

#include "dsp/base/Result.h"
#include "dsp/string/Build.h"
#include "dsp/string/Partials.h"

namespace hitchpin::string {

/// What is chosen at the bench.
struct Description {
    double speakingLength = 0.0; ///< m
    Build build;
    Ends ends;
};

/// What follows, at tension.
struct Statics {
    double linearDensity = 0.0;      ///< kg/m at pitch (thinned by the stretch where measured slack)
    double tension = 0.0;            ///< N
    double stress = 0.0;             ///< Pa, on the core's filled area at pitch
    double breakingLoad = 0.0;       ///< N
    double breakingShare = 0.0;      ///< tension / breakingLoad; over 1 the string would break
    double semitonesToBreaking = 0.0; ///< 6·log2(1/share); negative when it would break
    double stretch = 0.0;            ///< m that the speaking length stretched on the way to pitch
    double bendingStiffness = 0.0;   ///< N·m²
    double inharmonicity = 0.0;      ///< B = π²·EI/(T·L²), effective where the ends are bare
    double impedance = 0.0;          ///< Z0 = √(T·μ), kg/s
    double longitudinalHz = 0.0;     ///< fundamental of the longitudinal waves
    double outerDiameter = 0.0;      ///< m
};

struct Strung {
    Description description;
    Statics statics;
    Partials partials;
};

/// How far partials are computed exactly (count of determinant or eigenvalue roots). 
inline constexpr int defaultPartialCount = 128;

/// Fails, with the cause in words, where the figures cannot make a string.
Result<Strung> strungToPitch(const Description&, double firstPartialHz, int partialCount = defaultPartialCount);
Result<Strung> strungToTension(const Description&, double tension, int partialCount = defaultPartialCount);
/// The length at which this build sounds that pitch at that tension. `speakingLength` is ignored.
Result<Strung> cutToPitch(const Description&, double firstPartialHz, double tension, int partialCount = defaultPartialCount);
/// The plain core diameter that sounds that pitch at that tension and length. `build.core.diameter` is ignored.
Result<Strung> drawnToPitch(const Description&, double firstPartialHz, double tension, int partialCount = defaultPartialCount);

/// The same string, tuned at `strung`, after the climate moved by `kelvin` on a frame that expands by
/// `frameExpansionPerKelvin`: the speaking length follows the frame and the tension the difference.
Result<Strung> atTemperature(const Strung&, double kelvin, double frameExpansionPerKelvin);

/// The same string at the same tension, stopped by a fret so that a share of its length speaks (from the bridge).
Result<Strung> stoppedAt(const Strung&, double speakingShare);

} // namespace hitchpin::string
