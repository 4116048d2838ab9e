// From a string, its loop and a point on it to the filters of that place.
#pragma once

#include "dsp/design/LoopDesign.h"
#include "dsp/design/PlaceDesign.h"
#include "dsp/string/Partials.h"

namespace hitchpin::design {

/// What a place is for decides its level: string::releaseLevel or string::velocityLevel.
enum class PlaceUse { plucked, heard };

/// Fits S at the poles of the loop as it is, so that partials with a node there stay away. `ratio` is kept within
/// 0…1. The same place of a string a little off this one (the others of a unison, another fret) may lend its filters
/// as a start; null for none.
/// Allocates; not for the audio thread. Always gives a place; its accuracy says how true it is.
PlaceDesign makePlace(const string::Partials&, const LoopDesign&, PlaceUse, double ratio,
                      const PlaceDesign* neighbour = nullptr);

} // namespace hitchpin::design
