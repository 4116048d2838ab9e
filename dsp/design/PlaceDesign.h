// A designed place on a string: where it is plucked or listened to. Plain, immutable numbers that the engine runs.
#pragma once

#include "dsp/design/LoopDesign.h"

#include <vector>

namespace hitchpin::design {

/// How true a place is at the loop's own poles, over the covered partials up to the twentieth. The closed forms are
/// those of dsp/string/Places.h.
struct PlaceAccuracy {
    double worstLevelDb = 0.0; ///< where a partial has more than a tenth of its level at an antinode
    double worstNullDb = 0.0;  ///< how far under its level at an antinode a partial with a node there would stay
};

/// The waves of a place, seen from the bridge, are those of the bridge times level·(1 ± S): S is once from the place to
/// the end of the shorter side and back, the sign that of the end. A filter of some length may be later than the wave
/// is: then `delay` is negative, and what does not go through S waits instead.
///     S(z) = gain · ∏shelves · ∏sections · thiran · z^(−delay)
/// As it stands by default: a place at the bridge.
struct PlaceDesign {
    double firstPartialHz = 0.0; ///< of the string it was made for
    double ratio = 0.0; ///< of the speaking length, from the bridge; over ½ the shorter side is the nut's
    int delay = 0;      ///< whole samples
    double thiran = 1.0; ///< a in (a + z⁻¹)/(1 + a·z⁻¹); 1 passes unchanged
    double gain = 1.0;
    std::vector<LossShelf> shelves;
    std::vector<AllpassSection> sections;
    double levelGain = 1.0;
    std::vector<LossShelf> level;
    PlaceAccuracy accuracy;
};

} // namespace hitchpin::design
