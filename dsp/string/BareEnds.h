// Partials of a wound string whose core is left bare at the ends of its speaking length.
#pragma once

#include <vector>

namespace hitchpin::string {

/// A stretch at each end with less mass. Lengths as shares of the speaking length.
struct MassStep {
    double nutShare = 0.0;
    double bridgeShare = 0.0;
    double lackNut = 0.0;    ///< missing share of the linear density of the middle there, 0…1
    double lackBridge = 0.0;
};

/// One or two steps an end (a second winding may start later than the first); the lacks add.
using MassSteps = std::vector<MassStep>;

/// f_n over F0 of the wound middle, n = 1…count, for hinged ends and the stiffness `inharmonicity`
/// (B = π²EI/(TL²)) all along: the eigenvalues of the stiff string with stepped mass.
std::vector<double> steppedRatios(double inharmonicity, const MassSteps&, int count);

/// B that fits f_n² = n²F²(1 + Bn²) best over the lowest partials, by which such a string is usually described.
double effectiveInharmonicity(const std::vector<double>& frequencies);

} // namespace hitchpin::string
