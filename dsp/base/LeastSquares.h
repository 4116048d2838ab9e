// Nonlinear least squares for the fits of loop design and analysis.
#pragma once

#include <functional>
#include <span>
#include <vector>

namespace hitchpin {

/// Fills `residuals`, and `jacobian` unless it is empty: column by column, d residuals[i] / d parameters[j]
/// at jacobian[j·residuals.size() + i]. Returns false where these parameters are not allowed.
using ResidualFunction = std::function<bool(std::span<const double> parameters, std::span<double> residuals,
                                            std::span<double> jacobian)>;

struct LeastSquaresLimits {
    int iterations = 50;
    double largestStep = 0.0;          ///< of any one parameter in one iteration; 0: no limit
    double smallestImprovement = 1e-4; ///< share of the cost; two smaller ones in a row end the search
    double goodCost = 0.0;             ///< a sum of squares below this needs no further search
};

/// Levenberg (1944) and Marquardt (1963): Gauss–Newton steps, damped by the diagonal of JᵀJ until the cost
/// falls. Moves `parameters` to the least sum of squares it finds and returns that sum (infinity where the
/// start is not allowed). Allocates.
double minimiseSquares(const ResidualFunction&, std::vector<double>& parameters, std::size_t residualCount,
                       const LeastSquaresLimits& = {});

} // namespace hitchpin
