#include "dsp/design/LoopFit.h"

#include "dsp/base/LeastSquares.h"
#include "dsp/design/LossFit.h"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace hitchpin::design {

namespace {

using Complex = std::complex<double>;
constexpr double pi = std::numbers::pi;
constexpr double centsPerNeper = 1200.0 / std::numbers::ln2;

/// Keeps Thiran's delay in its range. True where it had left it.
bool holdThiran(LoopModel& model) {
    if (model.thiranDelay <= 0.0)
        return false;
    const double asked = model.thiranDelay;
    model.thiranDelay = std::clamp(asked, shortestThiran, longestThiran);
    return model.thiranDelay != asked;
}

} // namespace

double fit(LoopModel& model, const LoopTargets& targets, Fitted what, int iterations, double enough) {
    const std::size_t lossAt = firstLossConstant(model), count = constantCount(model);
    const bool movesPhase = what != Fitted::loss, movesLoss = what == Fitted::loss || what == Fitted::both;
    const std::size_t first = what == Fitted::loss ? lossAt : what == Fitted::sections ? 1 : 0;
    const std::size_t end = movesLoss ? count : lossAt;
    const std::size_t phaseRows = movesPhase ? targets.phase.size() : 0,
                      lossRows = movesLoss ? targets.loss.size() : 0;
    const std::size_t rows = phaseRows + lossRows;
    const std::vector<double> all = constantsOf(model);
    std::vector<double> constants(all.begin() + static_cast<std::ptrdiff_t>(first),
                                  all.begin() + static_cast<std::ptrdiff_t>(end));
    const auto targetOf = [&](std::size_t row) -> const LoopTarget& {
        return row < phaseRows ? targets.phase[row] : targets.loss[row - phaseRows];
    };
    // The part of the loop that stays as it is, once for all.
    std::vector<Complex> still(rows);
    for (std::size_t i = 0; i < rows && what != Fitted::both; ++i) {
        const LoopTarget& target = targetOf(i);
        if (movesPhase)
            still[i] = logLoss(model, target.s);
        else if (!target.beyond)
            still[i] = logLine(model, target.p, target.s);
    }
    for (std::size_t i = 0; i < rows && targets.lead != 0.0; ++i)
        if (!targetOf(i).beyond)
            still[i] += targets.lead * targetOf(i).p;

    std::vector<Complex> derivatives(count);
    const double lossScale = what == Fitted::both ? 100.0 / percentPerCent : 100.0;
    const auto residualsAt = [&](std::span<const double> trial, std::span<double> residuals,
                                 std::span<double> jacobian) {
        if (!setConstants(model, trial, first))
            return false;
        const bool delayHeld = holdThiran(model);
        if (model.delay() < leastDelay)
            return false;
        const std::span<Complex> wanted =
            jacobian.empty() ? std::span<Complex>{} : std::span<Complex>(derivatives);
        for (std::size_t i = 0; i < rows; ++i) {
            const LoopTarget& target = targetOf(i);
            Complex log = still[i];
            if (target.beyond) { // the loss alone counts, whatever the line does there
                log += target.loss;
                std::fill(derivatives.begin(), derivatives.begin() + static_cast<std::ptrdiff_t>(lossAt),
                          0.0);
            } else if (movesPhase) {
                log += logLine(model, target.p, target.s, wanted);
            }
            if (movesLoss)
                log += logLoss(model, target.s, wanted.empty() ? wanted : wanted.subspan(lossAt));
            if (i < phaseRows) {
                const double scale = target.weight * centsPerNeper / (target.p.imag() * target.groupDelay);
                residuals[i] = scale * (log.imag() + 2.0 * pi * target.turns);
                for (std::size_t j = first; j < end && !jacobian.empty(); ++j)
                    jacobian[(j - first) * rows + i] = scale * derivatives[j].imag();
            } else {
                const double scale = lossScale * lossWeight(target) / target.loss;
                residuals[i] = scale * log.real();
                for (std::size_t j = first; j < end && !jacobian.empty(); ++j)
                    jacobian[(j - first) * rows + i] = scale * derivatives[j].real();
            }
        }
        if (delayHeld && first == 0 && !jacobian.empty())
            std::fill_n(jacobian.begin(), rows, 0.0);
        return true;
    };
    const double cost = minimiseSquares(
        residualsAt, constants, rows,
        {.iterations = iterations, .largestStep = 0.7, .smallestImprovement = 1e-3, .goodCost = enough});
    setConstants(model, constants, first);
    holdThiran(model);
    return cost;
}

void splitDelay(LoopModel& model) {
    const double whole = std::max(1.0, std::floor(model.delay() - shortestThiran));
    model.thiranDelay = model.delay() - whole;
    model.straightDelay = whole;
}

/// Newton for the pole's decay and the delay together.
bool tuneExactly(LoopModel& model, const LoopTarget& target) {
    const double imaginary = target.p.imag();
    double real = target.p.real();
    std::vector<Complex> derivatives(firstLossConstant(model));
    for (int iteration = 0; iteration < 30; ++iteration) {
        const Complex p(real, imaginary), s = std::tanh(0.5 * p);
        const Complex miss =
            logLine(model, p, s, derivatives) + logLoss(model, s) + Complex(0.0, 2.0 * pi * target.turns);
        const Complex byReal = logLoopSlope(model, s), byDelay = derivatives[0];
        const double determinant = byReal.real() * byDelay.imag() - byReal.imag() * byDelay.real();
        const double realStep = -(miss.real() * byDelay.imag() - miss.imag() * byDelay.real()) / determinant;
        const double delayStep = -(byReal.real() * miss.imag() - byReal.imag() * miss.real()) / determinant;
        if (!std::isfinite(realStep) || !std::isfinite(delayStep))
            return false;
        real += realStep;
        model.thiranDelay += delayStep;
        if (model.delay() < leastDelay)
            return false;
        // Far from one sample the line has to take it; Thiran's section alone would bend the phase. Not at
        // once: near half the rate its delay is not what it is called, and the search would go back and
        // forth.
        if (model.thiranDelay < 0.2 * shortestThiran || model.thiranDelay > 2.0 * longestThiran)
            splitDelay(model);
        if (std::abs(delayStep) < 1e-13 * model.delay() &&
            std::abs(realStep) < 1e-14 + 1e-12 * std::abs(real))
            return true;
    }
    return true;
}

LoopModel scaled(LoopModel model, double ratio) {
    for (AllpassSection& section : model.sections) {
        section.c0 *= ratio * ratio;
        section.c1 *= ratio;
    }
    for (LossShelf& shelf : model.shelves)
        shelf.corner *= ratio;
    const double delay = model.delay() / ratio;
    double line = std::max(1.0, std::round(delay - model.thiranDelay));
    if (delay - line < shortestThiran && line > 1.0)
        line -= 1.0;
    else if (delay - line > longestThiran)
        line += 1.0;
    model.straightDelay = line;
    model.thiranDelay = delay - line;
    return model;
}

void followBeyond(const LoopModel& model, std::vector<LoopTarget>& loss, double sampleRate) {
    double stretch = 1.0; // of the pole's frequency against the string's, which changes steadily
    for (LoopTarget& target : loss) {
        if (!target.beyond)
            continue;
        const double wanted = 2.0 * pi * target.frequency / sampleRate;
        const Complex pole = loopPole(model, target.turns, {-target.decayRate / sampleRate, stretch * wanted});
        if (std::isnan(pole.imag()))
            return;
        stretch = pole.imag() / wanted;
        target.p = {0.0, pole.imag()};
        target.s = {0.0, std::tan(0.5 * pole.imag())};
        target.groupDelay = -logLoopSlope(model, target.s).real();
        target.loss = target.decayRate * target.groupDelay / sampleRate;
    }
}

std::vector<double> phaseMisses(const LoopModel& model, const std::vector<LoopTarget>& targets) {
    std::vector<double> cents;
    for (const LoopTarget& target : targets) {
        const Complex log = logLine(model, target.p, target.s) + logLoss(model, target.s);
        cents.push_back(centsPerNeper * (log.imag() + 2.0 * pi * target.turns) /
                        (target.p.imag() * target.groupDelay));
    }
    return cents;
}

std::vector<double> lossMisses(const LoopModel& model, const std::vector<LoopTarget>& targets) {
    std::vector<double> shares;
    for (const LoopTarget& target : targets) {
        const double line = target.beyond ? target.loss : logLine(model, target.p, target.s).real();
        shares.push_back(-(line + logLoss(model, target.s).real()) / target.loss);
    }
    return shares;
}

} // namespace hitchpin::design
