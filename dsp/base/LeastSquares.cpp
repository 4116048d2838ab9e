#include "dsp/base/LeastSquares.h"

#include <Eigen/Cholesky>
#include <Eigen/Core>

#include <cmath>
#include <limits>

namespace hitchpin {

double minimiseSquares(const ResidualFunction& residualsAt, std::vector<double>& parameters,
                       std::size_t residualCount, const LeastSquaresLimits& limits) {
    const auto rows = static_cast<Eigen::Index>(residualCount);
    const auto columns = static_cast<Eigen::Index>(parameters.size());
    Eigen::VectorXd residuals(rows), trialResiduals(rows);
    Eigen::MatrixXd jacobian(rows, columns), normal(columns, columns), damped(columns, columns);
    Eigen::VectorXd gradient(columns), step(columns);
    std::vector<double> trial(parameters.size());
    const std::span<double> jacobianSpan(jacobian.data(), static_cast<std::size_t>(jacobian.size()));

    if (!residualsAt(parameters, {residuals.data(), residualCount}, jacobianSpan))
        return std::numeric_limits<double>::infinity();
    double cost = residuals.squaredNorm();
    if (!std::isfinite(cost))
        return std::numeric_limits<double>::infinity();
    if (rows == 0 || columns == 0)
        return cost;

    double damping = 1e-3;
    int poorSteps = 0;
    for (int iteration = 0; iteration < limits.iterations && poorSteps < 2 && cost > limits.goodCost;
         ++iteration) {
        normal.setZero();
        normal.selfadjointView<Eigen::Lower>().rankUpdate(jacobian.transpose());
        gradient.noalias() = jacobian.transpose() * residuals;

        bool accepted = false;
        for (int attempt = 0; attempt < 12 && !accepted; ++attempt) {
            damped = normal;
            // The small constant keeps a parameter without influence (a shelf that fades out) in place.
            damped.diagonal().array() +=
                damping * (normal.diagonal().array() + 1e-12 * normal.diagonal().maxCoeff());
            step = damped.selfadjointView<Eigen::Lower>().ldlt().solve(-gradient);
            if (limits.largestStep > 0.0) {
                const double largest = step.cwiseAbs().maxCoeff();
                if (largest > limits.largestStep)
                    step *= limits.largestStep / largest;
            }
            for (std::size_t i = 0; i < trial.size(); ++i)
                trial[i] = parameters[i] + step[static_cast<Eigen::Index>(i)];
            double trialCost = std::numeric_limits<double>::infinity();
            if (step.allFinite() && residualsAt(trial, {trialResiduals.data(), residualCount}, {}))
                trialCost = trialResiduals.squaredNorm();
            if (trialCost < cost) { // false for NaN too
                accepted = true;
                poorSteps = cost - trialCost < limits.smallestImprovement * cost ? poorSteps + 1 : 0;
                cost = trialCost;
                parameters = trial;
                damping = std::max(damping * 0.2, 1e-12);
            } else {
                damping *= 5.0;
            }
        }
        if (!accepted)
            break;
        residualsAt(parameters, {residuals.data(), residualCount}, jacobianSpan);
    }
    return cost;
}

} // namespace hitchpin
