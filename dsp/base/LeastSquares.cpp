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
    Eigen::VectorXd gradient(columns), scale(columns), step(columns);
    std::vector<double> trial(parameters.size());
    const std::span<double> jacobianSpan(jacobian.data(), static_cast<std::size_t>(jacobian.size()));

    if (!residualsAt(parameters, {residuals.data(), residualCount}, jacobianSpan))
        return std::numeric_limits<double>::infinity();
    double cost = residuals.squaredNorm();
    if (!std::isfinite(cost))
        return std::numeric_limits<double>::infinity();
    if (rows == 0 || columns == 0)
        return cost;

    // Damping by how well the last step kept its promise (Nielsen 1999): no see-saw between too bold and too
    // timid.
    double damping = 1e-3, growth = 2.0;
    int poorSteps = 0;
    for (int iteration = 0; iteration < limits.iterations && poorSteps < 2 && cost > limits.goodCost;
         ++iteration) {
        normal.setZero();
        normal.selfadjointView<Eigen::Lower>().rankUpdate(jacobian.transpose());
        gradient.noalias() = jacobian.transpose() * residuals;
        // The small constant keeps a parameter without influence (a shelf that fades out) in place.
        scale = normal.diagonal().array() + 1e-12 * normal.diagonal().maxCoeff();

        bool accepted = false;
        for (int attempt = 0; attempt < 12 && !accepted; ++attempt) {
            damped = normal;
            damped.diagonal() += damping * scale;
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
                const double promised =
                    -2.0 * gradient.dot(step) - step.dot(normal.selfadjointView<Eigen::Lower>() * step);
                const double kept = (cost - trialCost) / promised;
                damping = std::max(damping * std::max(1.0 / 3.0, 1.0 - std::pow(2.0 * kept - 1.0, 3)), 1e-13);
                growth = 2.0;
                poorSteps = cost - trialCost < limits.smallestImprovement * cost ? poorSteps + 1 : 0;
                cost = trialCost;
                parameters = trial;
            } else {
                damping *= growth;
                growth *= 2.0;
            }
        }
        if (!accepted)
            break;
        residualsAt(parameters, {residuals.data(), residualCount}, jacobianSpan);
    }
    return cost;
}

} // namespace hitchpin
