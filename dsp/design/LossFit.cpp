#include "dsp/design/LossFit.h"

#include "dsp/base/LeastSquares.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <vector>

namespace hitchpin::design {

namespace {

constexpr std::size_t mostShelves = 6;

/// Those that are tried. Low shelves of second order, tried as well, made no loop truer and every design slower.
constexpr std::pair<LossShelf::Loses, int> kinds[] = {
    {LossShelf::Loses::high, 1}, {LossShelf::Loses::low, 1}, {LossShelf::Loses::high, 2}};

/// What is lost at rest, of the least of any partial.
constexpr double leastShare = 0.1;

struct LossPoint {
    double x2; ///< tan²(ω/2)
    double loss;
    double weight;
};

struct Candidate {
    LoopModel model;
    double cost;
};

/// 1/|H|² − 1 of filters in series.
double inSeries(double excess, double other) {
    return excess + other + excess * other;
}

double refine(LoopModel& model, const std::vector<LossPoint>& points, int iterations) {
    const std::size_t first = firstLossConstant(model), rows = points.size();
    std::vector<double> all = constantsOf(model);
    std::vector<double> constants(all.begin() + static_cast<std::ptrdiff_t>(first), all.end());
    std::vector<double> excess(rows);
    const double cost = minimiseSquares(
        [&](std::span<const double> trial, std::span<double> residuals, std::span<double> jacobian) {
            if (!setConstants(model, trial, first))
                return false;
            std::fill(excess.begin(), excess.end(), 0.0);
            for (std::size_t k = 0; k < model.shelves.size(); ++k) {
                const ShelfLoss shelf(model.shelves[k]);
                for (std::size_t i = 0; i < rows; ++i) {
                    const ShelfLoss::At at = shelf.at(points[i].x2);
                    excess[i] = inSeries(excess[i], at.excess);
                    if (!jacobian.empty()) {
                        const double scale = 100.0 * points[i].weight / points[i].loss;
                        jacobian[(1 + 2 * k) * rows + i] = scale * at.byCorner;
                        jacobian[(2 + 2 * k) * rows + i] = scale * at.byDepth;
                    }
                }
            }
            for (std::size_t i = 0; i < rows; ++i) {
                const double scale = 100.0 * points[i].weight / points[i].loss;
                residuals[i] = scale * (model.loss + 0.5 * std::log1p(excess[i]) - points[i].loss);
                if (!jacobian.empty())
                    jacobian[i] = scale * model.loss;
            }
            return true;
        },
        constants, rows, {.iterations = iterations, .largestStep = 1.5, .smallestImprovement = 1e-3});
    setConstants(model, constants, first);
    return cost;
}

double worstPercent(const LoopModel& model, const std::vector<LossPoint>& points) {
    double worst = 0.0;
    for (const auto& [x2, loss, weight] : points) {
        double excess = 0.0;
        for (const LossShelf& shelf : model.shelves)
            excess = inSeries(excess, ShelfLoss(shelf).at(x2).excess);
        worst = std::max(worst, 100.0 * weight * std::abs((model.loss + 0.5 * std::log1p(excess)) / loss - 1.0));
    }
    return worst;
}

} // namespace

double lossImportance(const LoopTarget& target) {
    const bool counts = target.frequency <= t60CountsUpTo;
    if (target.beyond)
        return (counts ? 1.0 : 0.2) * std::min(1.0, 0.5 / target.loss);
    return counts ? 1.0 : 0.3;
}

double lossWeight(const LoopTarget& target) {
    return target.weight * lossImportance(target);
}

void fitLoss(LoopModel& model, const std::vector<LoopTarget>& targets, double goodPercent) {
    std::vector<LossPoint> points;
    double least = std::numeric_limits<double>::infinity();
    for (const LoopTarget& target : targets) {
        const double x = std::tan(0.5 * target.p.imag());
        points.push_back({x * x, target.loss, lossWeight(target)});
        least = std::min(least, target.loss);
    }
    std::vector<LossPoint> few; // to judge candidates by
    for (std::size_t i = 0; i < points.size(); i += i < 8 ? 1 : 1 + points.size() / 16)
        few.push_back(points[i]);

    model.loss = 0.9 * least;
    model.leastLoss = leastShare * least;
    model.shelves.clear();
    double cost = refine(model, points, 20);
    const double lowest = std::sqrt(points.front().x2),
                 highest = std::max(2.0 * lowest, std::sqrt(points.back().x2));
    while (worstPercent(model, points) > goodPercent && model.shelves.size() < mostShelves &&
           1 + 2 * (model.shelves.size() + 1) <= points.size()) {
        constexpr int corners = 8, shortlisted = 3;
        std::vector<Candidate> candidates;
        for (int i = 0; i < corners; ++i) {
            for (const auto& [loses, order] : kinds) {
                LoopModel candidate = model;
                const double corner = lowest * std::pow(highest / lowest, (i + 0.5) / corners);
                // As deep as what is to be lost at its corner.
                const auto there =
                    std::find_if(points.begin(), points.end() - 1,
                                 [&](const LossPoint& point) { return point.x2 >= corner * corner; });
                candidate.shelves.push_back({loses, order, corner, there->loss / order});
                const double candidateCost = refine(candidate, few, 8);
                candidates.push_back({std::move(candidate), candidateCost});
            }
        }
        std::partial_sort(candidates.begin(), candidates.begin() + shortlisted, candidates.end(),
                          [](const Candidate& a, const Candidate& b) { return a.cost < b.cost; });
        const double before = cost;
        for (int i = 0; i < shortlisted; ++i) {
            Candidate& candidate = candidates[static_cast<std::size_t>(i)];
            const double refined = refine(candidate.model, points, 40);
            if (refined < cost) {
                cost = refined;
                model = std::move(candidate.model);
            }
        }
        if (!(cost < before))
            break;
    }

    // A shelf far below the lowest partial does the same to all of them, and would only leave a slow state that
    // no damper reaches: what it takes is part of the constant.
    std::erase_if(model.shelves, [&](const LossShelf& shelf) {
        if (shelf.corner > lowest / 16.0)
            return false;
        model.loss += shelf.loses == LossShelf::Loses::high ? shelf.order * shelf.depth : 0.0;
        return true;
    });
}

} // namespace hitchpin::design
