// A string's cross-section: core, windings, and what follows from them alone. SI units.
#pragma once

#include "dsp/string/Material.h"

#include <optional>
#include <vector>

namespace hitchpin::string {

enum class CoreShape { round, hex };
enum class WindingShape { round, flat };

/// Whether a measure was taken on the slack string or on the string at pitch.
enum class Measured { slack, atPitch };

struct Core {
    Material material;
    double diameter = 0.0; ///< m; across flats for a hexagon
    CoreShape shape = CoreShape::round;
    Measured measured = Measured::slack;
};

struct Winding {
    Material material;
    WindingShape shape = WindingShape::round;
    double diameter = 0.0;     ///< m, round wire
    double thickness = 0.0;    ///< m, flat wire, along the radius
    double width = 0.0;        ///< m, flat wire, along the string
    double bareAtNut = 0.0;    ///< m of core left bare within the speaking length
    double bareAtBridge = 0.0; ///< m
    double loss = 0.0;         ///< added to 1/Q
};

/// Core and at most two windings, the inner first.
struct Build {
    Core core;
    std::vector<Winding> windings;
    std::optional<double> linearDensity;    ///< kg/m, weighed: replaces the computed one
    std::optional<double> bendingStiffness; ///< N·m², measured: replaces the computed one
};

double coreArea(const Build&);            ///< m², filled area that carries the tension
double coreLinearDensity(const Build&);   ///< kg/m of the core alone
double windingLinearDensity(const Build&, std::size_t winding); ///< kg/m of one winding layer, true helix
double linearDensity(const Build&);       ///< kg/m of the wound length, slack
double outerDiameter(const Build&);       ///< m
double coreBendingStiffness(const Build&); ///< E·I of the core, N·m² (windings slide and add none)

} // namespace hitchpin::string
