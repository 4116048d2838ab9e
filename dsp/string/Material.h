// What a string can be made of. SI units throughout.
#pragma once

#include <string>
#include <string_view>
#include <vector>

namespace hitchpin::string {

/// Tensile strength measured on wire of one diameter.
struct StrengthPoint {
    double diameter;  ///< m
    double strength;  ///< Pa
};

struct Material {
    std::string name;
    double density = 0.0;          ///< kg/m³
    double youngsModulus = 0.0;    ///< Pa, at the speed of vibration: bending stiffness, longitudinal waves
    double slowModulus = 0.0;      ///< Pa, under a held pull: stretch, thinning, temperature
    double tensileStrength = 0.0;  ///< Pa; used where `strengthByDiameter` is empty
    std::vector<StrengthPoint> strengthByDiameter; ///< by rising diameter
    double workingShare = 0.0;     ///< share of the breaking load that is usual at most, 0…1
    double fill = 1.0;             ///< filled share of the circle; under 1 for a core of filaments
    double bendingLoss = 0.0;      ///< δ in 1/Q = δ·Bn²/(1+Bn²)
    double constantLoss = 0.0;     ///< added to 1/Q as it is
    double expansionPerKelvin = 0.0; ///< 1/K
    std::string remarks;           ///< source of the figures

    /// Strength of this material drawn to a diameter (m): the table where there is one, linear between its
    /// rows, the first row below it, and never more than the last row above it.
    double strengthAt(double diameter) const;
};

/// The materials known from the start, each with its source in `remarks`.
const std::vector<Material>& builtInMaterials();

/// nullptr where the name is not known. Names are lower case: "music wire", "nylon".
const Material* findBuiltInMaterial(std::string_view name);

} // namespace hitchpin::string
