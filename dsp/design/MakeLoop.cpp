#include "dsp/design/MakeLoop.h"

#include "dsp/base/LeastSquares.h"
#include "dsp/design/AllpassPlacement.h"
#include "dsp/design/LoopModel.h"
#include "dsp/design/LoopTargets.h"
#include "dsp/design/LossFit.h"

#include <algorithm>
#include <cmath>
#include <cstdio>
#include <limits>
#include <numbers>
#include <optional>

namespace hitchpin::design {

namespace {

using Complex = std::complex<double>;
constexpr double pi = std::numbers::pi;
constexpr double centsPerNeper = 1200.0 / std::numbers::ln2;

/// Above this share of the rate the first partial leaves no whole sample of delay beside the filters.
constexpr double highestFirstPartial = 0.4;
/// One sample for the line and half a one for Thiran's section.
constexpr double leastDelay = 1.5;
/// A loss fit this good (root mean square, per cent) needs no more shelves.
constexpr double goodLossLive = 0.7, goodLossReference = 0.1;
/// A fit this good (root mean square, cents) needs no further search.
constexpr double goodCentsLive = 0.02;
constexpr double goodCentsReference = 0.003;
/// Worst partial of a design that needs no more sections, cents; and how many more are tried.
constexpr double trueCents = 1.0;
constexpr int mostExtra = 4;
/// Partials at the end of the covered ones that may be given up for that.
constexpr int mostTrimmed = 3;
/// Hz: higher up nobody hears how long a partial rings.
constexpr double t60CountsUpTo = 6000.0;
/// Losses off by more than this are fitted again together with the phase.
constexpr double goodT60 = 0.03;
/// In a fit of both, so many per cent of T60 weigh as much as a cent.
constexpr double percentPerCent = 3.0;
/// The report goes at least this far, also where the fit does not.
constexpr int leastReported = 64;

/// Thiran's section is most nearly a plain delay around one sample. A fit that leads further away uses it as
/// one more dispersion section and gets lost.
constexpr double shortestThiran = 0.5, longestThiran = 1.5;

/// From one fractional delay to whole samples and Thiran's section.
void splitDelay(LoopModel& model) {
    const double whole = std::max(1.0, std::floor(model.delay() - shortestThiran));
    model.thiranDelay = model.delay() - whole;
    model.straightDelay = whole;
}

/// Keeps Thiran's delay in its range. True where it had left it.
bool holdThiran(LoopModel& model) {
    if (model.thiranDelay <= 0.0)
        return false;
    const double asked = model.thiranDelay;
    model.thiranDelay = std::clamp(asked, shortestThiran, longestThiran);
    return model.thiranDelay != asked;
}

double goodCost(const LoopSettings& settings, const std::vector<LoopTarget>& phase) {
    const double cents = settings.quality == Quality::live ? goodCentsLive : goodCentsReference;
    return cents * cents * static_cast<double>(phase.size());
}

/// The same loop with everything in it moved to `ratio` times its frequency; the fraction of the delay stays
/// near where it was.
LoopModel scaled(LoopModel model, double ratio) {
    for (AllpassSection& section : model.sections) {
        section.c0 *= ratio * ratio;
        section.c1 *= ratio;
    }
    for (ShelfModel& shelf : model.shelves)
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

enum class Fitted { sections, phase, loss, both }; // sections: phase with the delay held

/// Moves the model's constants towards the targets' poles. Phase in cents at `phase`, loss in per cent at
/// `loss`, both at the damped poles. Returns the sum of squares.
double fit(LoopModel& model, const std::vector<LoopTarget>& phase, const std::vector<LoopTarget>& loss,
           Fitted what, int iterations, double enough = 0.0) {
    const std::size_t lossAt = firstLossConstant(model), count = constantCount(model);
    const bool movesPhase = what != Fitted::loss, movesLoss = what == Fitted::loss || what == Fitted::both;
    const std::size_t first = what == Fitted::loss ? lossAt : what == Fitted::sections ? 1 : 0;
    const std::size_t end = movesLoss ? count : lossAt;
    const std::size_t phaseRows = movesPhase ? phase.size() : 0, lossRows = movesLoss ? loss.size() : 0;
    const std::size_t rows = phaseRows + lossRows;
    const std::vector<double> all = constantsOf(model);
    std::vector<double> constants(all.begin() + static_cast<std::ptrdiff_t>(first),
                                  all.begin() + static_cast<std::ptrdiff_t>(end));
    const auto targetOf = [&](std::size_t row) -> const LoopTarget& {
        return row < phaseRows ? phase[row] : loss[row - phaseRows];
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

/// Sets the delay so that the loop's own pole has exactly the frequency of the target: Newton for the pole's
/// decay and the delay together.
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

/// Worst errors over the covered partials; NaN must not pass for small.
void summarise(LoopAccuracy& accuracy) {
    accuracy.worstCents = accuracy.worstT60Error = 0.0;
    int found = 0;
    for (const LoopAccuracy::PartialError& error : accuracy.partials) {
        if (error.number > accuracy.coveragePartial)
            break;
        ++found;
        accuracy.coverageHz = error.targetHz;
        accuracy.worstCents = std::max(accuracy.worstCents, std::abs(error.cents));
        if (error.targetHz <= t60CountsUpTo)
            accuracy.worstT60Error = std::max(accuracy.worstT60Error, std::abs(error.t60Ratio - 1.0));
    }
    if (found < accuracy.coveragePartial)
        accuracy.worstCents = std::numeric_limits<double>::infinity();
}

LoopAccuracy measure(const LoopModel& model, const string::Partials& partials, double sampleRate,
                     const LoopPlan& plan) {
    LoopAccuracy accuracy;
    accuracy.coveragePartial = plan.coveredPartial;
    double cents = 0.0;
    for (int n = 1; n <= std::max(plan.coveredPartial, leastReported); ++n) {
        const LoopTarget target = targetAt(partials, sampleRate, n);
        if (n > plan.coveredPartial && target.frequency > 0.45 * sampleRate)
            break;
        // Beyond the covered partials the loop drifts away steadily: start from where the last one was.
        const Complex start(target.p.real(), target.p.imag() * std::exp(cents / centsPerNeper));
        const Complex pole = loopPole(model, target.turns, start);
        if (std::isnan(pole.imag()))
            continue;
        cents = centsPerNeper * std::log(pole.imag() / target.p.imag());
        accuracy.partials.push_back({n, target.frequency, cents, target.p.real() / pole.real()});
    }
    summarise(accuracy);
    return accuracy;
}

/// Where the sections hardly suffice the last partials may be off: then they do not count as covered.
void trimCoverage(LoopAccuracy& accuracy) {
    for (const LoopAccuracy::PartialError& error : accuracy.partials) {
        if (error.number > accuracy.coveragePartial || std::abs(error.cents) <= trueCents)
            continue;
        if (error.number > 1 && error.number > accuracy.coveragePartial - mostTrimmed) {
            accuracy.coveragePartial = error.number - 1;
            summarise(accuracy);
        }
        return;
    }
}

std::string shortNumber(double value) {
    char text[32];
    std::snprintf(text, sizeof text, "%.6g", value);
    return text;
}

std::optional<Failure> cannotRun(const string::Partials& partials, const LoopSettings& settings) {
    if (!(settings.sampleRate >= 8000.0 && settings.sampleRate <= 1.0e6))
        return Failure{"the sample rate is " + shortNumber(settings.sampleRate) +
                       " Hz: must be 8000 to 1000000 Hz"};
    const double first = partials.frequency(1.0);
    if (!(first > 0.0 && std::isfinite(first)))
        return Failure{"the string has no first partial (" + shortNumber(first) + " Hz)"};
    if (first > highestFirstPartial * settings.sampleRate)
        return Failure{"its first partial, " + shortNumber(first) + " Hz, is too high for a sample rate of " +
                       shortNumber(settings.sampleRate) + " Hz: must be at most " +
                       shortNumber(highestFirstPartial * settings.sampleRate) + " Hz"};
    return std::nullopt;
}

/// The design of a finished model; none where it is not sound.
std::optional<LoopDesign> completed(const LoopModel& model, LoopAccuracy accuracy,
                                    const string::Partials& partials, const LoopSettings& settings) {
    LoopDesign design = designOf(model);
    design.sampleRate = settings.sampleRate;
    design.firstPartialHz = partials.frequency(1.0);
    design.turn = partials.ends().oneFree() ? -1.0 : 1.0;
    design.accuracy = std::move(accuracy);
    design.accuracy.peakLoopGain = peakGain(design);
    if (!std::isfinite(design.accuracy.worstCents) || !(design.accuracy.peakLoopGain < 1.0))
        return std::nullopt;
    return design;
}

/// The last steps, alike for cold and warm starts: whole delay, loss on the damped poles, exact first
/// partial.
std::optional<LoopDesign> finish(LoopModel model, const string::Partials& partials,
                                 const LoopSettings& settings, const LoopPlan& plan,
                                 const std::vector<LoopTarget>& phase, const std::vector<LoopTarget>& loss,
                                 int iterations) {
    splitDelay(model);

    fit(model, phase, loss, Fitted::loss, iterations);
    fit(model, phase, loss, Fitted::phase, iterations, goodCost(settings, phase));
    splitDelay(model);
    if (!tuneExactly(model, phase.front()))
        return std::nullopt;
    LoopAccuracy accuracy = measure(model, partials, settings.sampleRate, plan);

    if (accuracy.worstT60Error > goodT60 || accuracy.worstCents > 1.0 ||
        plan.coveredPartial <= 2 * plan.sections + 1) {
        LoopModel joint = model;
        fit(joint, phase, loss, Fitted::both, 2 * iterations);
        splitDelay(joint);
        if (tuneExactly(joint, phase.front())) {
            const LoopAccuracy jointAccuracy = measure(joint, partials, settings.sampleRate, plan);
            const auto badness = [](const LoopAccuracy& a) {
                return a.worstCents + 100.0 / percentPerCent * a.worstT60Error;
            };
            if (badness(jointAccuracy) < badness(accuracy)) {
                model = joint;
                accuracy = jointAccuracy;
            }
        }
    }

    // Where the sections hardly suffice, the error is spread evenly: what is worst counts more, round by
    // round.
    if (accuracy.worstCents > trueCents && !phase.empty()) {
        std::vector<LoopTarget> weighted = phase;
        LoopModel even = model;
        for (int round = 0; round < 6 && accuracy.worstCents > trueCents; ++round) {
            double sum = 0.0;
            std::vector<double> miss;
            for (const LoopTarget& target : weighted) {
                const Complex log = logLine(even, target.p, target.s) + logLoss(even, target.s);
                miss.push_back(std::abs(log.imag() + 2.0 * pi * target.turns) /
                               (target.p.imag() * target.groupDelay));
                sum += miss.back() * miss.back();
            }
            const double mean = std::sqrt(sum / static_cast<double>(miss.size()));
            for (std::size_t i = 0; i < miss.size(); ++i)
                weighted[i].weight *= std::sqrt(std::clamp(miss[i] / mean, 0.5, 4.0));
            fit(even, weighted, loss, Fitted::phase, iterations);
            if (!tuneExactly(even, phase.front()))
                break;
            LoopAccuracy evenAccuracy = measure(even, partials, settings.sampleRate, plan);
            if (evenAccuracy.worstCents < accuracy.worstCents) {
                model = even;
                accuracy = std::move(evenAccuracy);
            }
        }
    }

    return completed(model, std::move(accuracy), partials, settings);
}

/// What a good fit of a string ends at (root mean square, cents), by the sections it has beyond X(n). Where
/// fits go wrong they go wrong by much more.
double usualCents(const LoopPlan& plan) {
    const double spare = plan.sections - plan.needed;
    return std::max(0.01, 0.35 * std::pow(10.0, 0.4 * (1.2 - spare)));
}

/// The best fit of the phase from several starts.
std::optional<LoopModel> fitPhase(const LoopModel& lossy, const string::Partials& partials,
                                  const LoopSettings& settings, const LoopPlan& plan,
                                  const std::vector<LoopTarget>& phase, const std::vector<LoopTarget>& loss) {
    const double enough = goodCost(settings, phase);
    const double usual = usualCents(plan) * usualCents(plan) * static_cast<double>(phase.size());
    std::optional<LoopModel> best;
    double bestCost = std::numeric_limits<double>::infinity();
    const auto keep = [&](const LoopModel& model, double cost) {
        if (cost < bestCost) {
            bestCost = cost;
            best = model;
        }
        return bestCost <= usual;
    };
    std::vector<double> endsSeen;
    for (const double flatness : {0.4, 0.6, 0.5, 0.7}) {
        LoopModel model = lossy;
        if (!placeSections(model, partials, settings.sampleRate, plan.coveredPartial, plan.sections,
                           flatness))
            continue;
        // First with a plain delay, which may move far from where the placement put it.
        const double plainCost = fit(model, phase, loss, Fitted::phase, 100, enough);
        const auto sameEnd = [&](double seen) { return std::abs(plainCost / seen - 1.0) < 0.02; };
        if (!std::isfinite(plainCost) || std::any_of(endsSeen.begin(), endsSeen.end(), sameEnd))
            continue;
        endsSeen.push_back(plainCost);

        // Then with Thiran's section at the delay found…
        LoopModel split = model;
        splitDelay(split);
        if (keep(split, fit(split, phase, loss, Fitted::phase, 100, enough)))
            return best;
        // …and, where it was pulled to the end of its range, with one sample more or less in the line,
        // starting from a bare sample, whose phase is straight to the top, once the sections have taken up
        // the rest.
        for (int further = 0; further < 3; ++further) {
            const double direction = split.thiranDelay > longestThiran - 0.01    ? 1.0
                                     : split.thiranDelay < shortestThiran + 0.01 ? -1.0
                                                                                 : 0.0;
            const double line = split.straightDelay + direction;
            if (direction == 0.0 || line < 1.0)
                break;
            split = model;
            split.straightDelay = line;
            split.thiranDelay = 1.0;
            fit(split, phase, loss, Fitted::sections, 50, enough);
            if (keep(split, fit(split, phase, loss, Fitted::phase, 100, enough)))
                return best;
        }
        if (plan.sections == 0)
            break;
    }
    return best;
}

} // namespace

Result<LoopDesign> makeLoop(const string::Partials& partials, const LoopSettings& settings) {
    if (const auto failure = cannotRun(partials, settings))
        return *failure;
    LoopPlan plan = planLoop(partials, settings);
    const auto phase = phaseTargets(partials, settings.sampleRate, plan.coveredPartial);
    auto loss = lossTargets(partials, settings.sampleRate, plan.coveredPartial);
    LoopModel lossy;
    fitLoss(lossy, loss, settings.quality == Quality::live ? goodLossLive : goodLossReference);

    // The count planned, then some more where that is not true enough, then fewer: high strings may have no
    // room for all, since every section takes delay out of the line.
    std::vector<int> counts;
    const int most = std::min(mostSections(settings.quality), plan.coveredPartial - 1);
    for (int count = plan.sections; count <= std::min(plan.sections + mostExtra, most); ++count)
        counts.push_back(count);
    for (int count = plan.sections - 1; count >= 0; --count)
        counts.push_back(count);

    std::optional<LoopDesign> best;
    for (const int count : counts) {
        if (best && (best->accuracy.worstCents <= trueCents || count < plan.sections))
            break;
        plan.sections = count;
        const auto model = fitPhase(lossy, partials, settings, plan, phase, loss);
        if (!model)
            continue;
        auto design = finish(*model, partials, settings, plan, phase, loss, 20);
        if (design && (!best || design->accuracy.worstCents < best->accuracy.worstCents))
            best = std::move(design);
    }
    if (best) {
        trimCoverage(best->accuracy);
        return *std::move(best);
    }
    return Failure{"no loop could be fitted to a first partial of " + shortNumber(partials.frequency(1.0)) +
                   " Hz at a sample rate of " + shortNumber(settings.sampleRate) + " Hz"};
}

Result<LoopDesign> retuneLoop(const LoopDesign& neighbour, const string::Partials& partials,
                              const LoopSettings& settings) {
    if (const auto failure = cannotRun(partials, settings))
        return *failure;
    const bool sameKind = neighbour.sampleRate == settings.sampleRate &&
                          (neighbour.turn < 0.0) == partials.ends().oneFree() && neighbour.gain < 1.0;
    LoopPlan plan = planLoop(partials, settings);
    if (sameKind && plan.sections == static_cast<int>(neighbour.sections.size())) {
        const auto phase = phaseTargets(partials, settings.sampleRate, plan.coveredPartial);
        const auto loss = lossTargets(partials, settings.sampleRate, plan.coveredPartial);
        // As true as the neighbour within so much more of its error, and true at all where the neighbour was.
        const auto trueEnough = [&](const LoopAccuracy& accuracy, double more) {
            const LoopAccuracy& known = neighbour.accuracy;
            const double cents = (1.0 + more) * known.worstCents + 0.2 * more;
            return accuracy.worstCents <= std::min(cents, std::max(trueCents, known.worstCents)) &&
                   accuracy.worstT60Error <= (1.0 + more) * known.worstT60Error + 0.02 * more;
        };
        LoopModel model = scaled(modelOf(neighbour), phase.front().frequency / neighbour.firstPartialHz);
        if (model.delay() >= leastDelay && tuneExactly(model, phase.front())) {
            // Another tension changes every partial alike, and the loop is ready as it stands.
            LoopAccuracy accuracy = measure(model, partials, settings.sampleRate, plan);
            if (!trueEnough(accuracy, 0.2)) {
                if (auto design = finish(model, partials, settings, plan, phase, loss, 6);
                    design && trueEnough(design->accuracy, 0.5))
                    return *std::move(design);
            } else if (auto design = completed(model, std::move(accuracy), partials, settings)) {
                return *std::move(design);
            }
        }
    }
    return makeLoop(partials, settings);
}

} // namespace hitchpin::design
