// A designed place on a string in the form that a rail runs.
#pragma once

#include "dsp/design/PlaceDesign.h"
#include "dsp/engine/Chain.h"

namespace hitchpin::engine {

/// The end nearer to a place, and how much of the string lies between.
struct NearerEnd {
    bool isBridge = true;
    double share = 0.0;

    NearerEnd() = default;
    explicit NearerEnd(double ratioFromBridge) noexcept
        : isBridge(ratioFromBridge <= 0.5), share(isBridge ? ratioFromBridge : 1.0 - ratioFromBridge) {}
};

struct Place {
    explicit Place(const design::PlaceDesign& design)
        : end(design.ratio), delay(design.delay), side(design.gain, design.thiran, design.shelves, design.sections),
          level(design.levelGain, 1.0, design.level, {}) {}

    NearerEnd end;
    int delay;   ///< whole samples of the way to that end and back; negative: what does not go there waits instead
    Chain side;  ///< the rest of that way
    Chain level;
};

} // namespace hitchpin::engine
