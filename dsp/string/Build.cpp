#include "dsp/string/Build.h"

#include <cmath>
#include <numbers>

namespace hitchpin::string {
namespace {

constexpr double pi = std::numbers::pi;

/// Radial thickness of a layer.
double layerThickness(const Winding& winding) {
    return winding.shape == WindingShape::round ? winding.diameter : winding.thickness;
}

/// Diameter on which winding `index` lies.
double diameterUnder(const Build& build, std::size_t index) {
    double diameter = build.core.diameter;
    for (std::size_t i = 0; i < index; ++i)
        diameter += 2.0 * layerThickness(build.windings[i]);
    return diameter;
}

/// Area of the core's outline: d²·π/4, or d²·√3/2 for a hexagon of width d across flats.
double outlineArea(const Core& core) {
    const double d2 = core.diameter * core.diameter;
    return core.shape == CoreShape::round ? d2 * pi / 4.0 : d2 * std::numbers::sqrt3 / 2.0;
}

} // namespace

double coreArea(const Build& build) { return outlineArea(build.core) * build.core.material.fill; }

double coreLinearDensity(const Build& build) { return coreArea(build) * build.core.material.density; }

/// A close helix of wire of cross-section A on a mean diameter D advances by its own width w each turn, so a metre
/// of string holds (1/w)·√((πD)² + w²) of wire:  μ = ρ·A·√((πD)² + w²)/w.
/// Round wire: A = πd²/4, w = d: the close-packed (π²/4)·d·D·ρ times √(1 + (d/πD)²).
/// Exact geometry; close winding assumed. A hexagon is wound on its corners' circle only in part: the mean of its
/// flats and corners, (1 + 2/√3)/2 of the width across flats, is taken.
double windingLinearDensity(const Build& build, std::size_t index) {
    const Winding& winding = build.windings[index];
    const bool round = winding.shape == WindingShape::round;
    const double advance = round ? winding.diameter : winding.width;
    const double area = round ? pi / 4.0 * winding.diameter * winding.diameter : winding.thickness * winding.width;
    double under = diameterUnder(build, index);
    if (build.core.shape == CoreShape::hex)
        under += build.core.diameter * 0.5 * (2.0 / std::numbers::sqrt3 - 1.0);
    const double turn = pi * (under + layerThickness(winding));
    return winding.material.density * area * std::hypot(turn, advance) / advance;
}

double linearDensity(const Build& build) {
    if (build.linearDensity)
        return *build.linearDensity;
    double sum = coreLinearDensity(build);
    for (std::size_t i = 0; i < build.windings.size(); ++i)
        sum += windingLinearDensity(build, i);
    return sum;
}

double outerDiameter(const Build& build) { return diameterUnder(build, build.windings.size()); }

/// Round: I = πd⁴/64. Hexagon of width d across flats: I = 5√3/144·d⁴ (about every axis alike). A core of filaments
/// bends less than a solid one; taking the filled share of the solid's I is an upper bound (common practice is to
/// weigh in a measured stiffness instead, which `bendingStiffness` is for).
double coreBendingStiffness(const Build& build) {
    if (build.bendingStiffness)
        return *build.bendingStiffness;
    const double d2 = build.core.diameter * build.core.diameter;
    const double shape = build.core.shape == CoreShape::round ? pi / 64.0 : 5.0 * std::numbers::sqrt3 / 144.0;
    return build.core.material.youngsModulus * shape * d2 * d2 * build.core.material.fill;
}

} // namespace hitchpin::string
