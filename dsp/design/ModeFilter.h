// A resonance of the board as numbers to run: trapezoidal, so passive, with pole and peak exactly where they belong.
#pragma once

#include "dsp/board/Soundboard.h"

namespace hitchpin::design {

/// States u and e, both velocities: of the mode, and its deflection times √(k/m). One step under the force f:
///     ū = D·(2u − κe) + G·f      u ← 2ū − u      e ← e + κū
/// ū is what the bridge feels. Energy m(u² + e²)/2; each step it grows by exactly h·ū·(f − r·ū).
struct ModeFilter {
    double d = 0.0;
    double kappa = 0.0;
    double g = 0.0;    ///< velocity at once, m/s per N
    double mass = 0.0; ///< kg, of the stored energy: the mode's own but for the sampling
};

/// The bilinear map bends frequencies; pole e^(s/fs) and the peak Q/(mω) are set exactly, what bends is the skirt.
ModeFilter modeFilter(const board::Mode&, double sampleRate);

/// Velocity over force, gain·s/(s² + a·s + b) with s = tanh(p/2) at z = e^p.
struct ModeResponse {
    double gain, a, b;
};
ModeResponse responseOf(const ModeFilter&) noexcept;

/// Modes above this share of the rate are left out: what they would do below it is a mass too small to matter.
inline constexpr double highestModeShareOfRate = 0.45;

} // namespace hitchpin::design
