#include "dsp/design/MakeLoop.h"

#include "dsp/design/AllpassPlacement.h"
#include "dsp/design/LoopFit.h"
#include "dsp/design/LoopModel.h"
#include "dsp/design/LoopReport.h"
#include "dsp/design/LoopTargets.h"
#include "dsp/design/LossFit.h"

#include <algorithm>
#include <cmath>
#include <cstdio>
#include <limits>
#include <optional>
#include <span>

namespace hitchpin::design {

namespace {

/// Above this share of the rate the first partial leaves no whole sample of delay beside the filters.
constexpr double highestFirstPartial = 0.4;
/// A loss fit this good (worst, per cent) needs no more shelves.
constexpr double goodLossLive = 0.7, goodLossReference = 0.2;
/// A phase fit this good (root mean square, cents) needs no further search.
constexpr double goodCentsLive = 0.02, goodCentsReference = 0.003;
/// What the partials of a loop of reference quality are to keep, worst and root mean square, cents.
constexpr double worstReference = 0.45, meanReference = 0.07;
/// Sections that are added at most where those planned do not make the partials true.
constexpr int mostExtra = 4;
/// Losses off by more than this are fitted again together with the phase.
constexpr double goodT60 = 0.01;
/// Steps of the last fits: of a design from nothing, and of one that begins at its neighbour.
constexpr int coldSteps = 20, warmSteps = 6;

/// One string to be designed.
struct Task {
    const string::Partials& partials;
    LoopSettings settings;
    LoopPlan plan;
    LoopTargets targets;

    Task(const string::Partials& asked, const LoopSettings& wanted)
        : partials(asked), settings(wanted),
          plan(planLoop(asked, wanted)), targets{phaseTargets(asked, wanted.sampleRate, plan.coveredPartial),
                                                 lossTargets(asked, wanted.sampleRate, plan.coveredPartial)} {
    }

    const LoopTarget& first() const { return targets.phase.front(); }
    /// Sum of squares of a phase fit with that root mean square.
    double cost(double cents) const { return cents * cents * static_cast<double>(targets.phase.size()); }
    double goodCost() const {
        return cost(settings.quality == Quality::live ? goodCentsLive : goodCentsReference);
    }
    /// By how much the partials miss what this quality is to keep: no further work is needed up to 1.
    double miss(const LoopAccuracy& accuracy) const {
        if (settings.quality == Quality::live)
            return accuracy.worstCents / trueCents;
        return std::max(accuracy.worstCents / worstReference, accuracy.meanCents / meanReference);
    }
    double goodLoss() const { return settings.quality == Quality::live ? goodLossLive : goodLossReference; }
    LoopAccuracy measure(const LoopModel& model) const {
        return measureLoop(model, partials, settings.sampleRate, plan);
    }
};

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
std::optional<LoopDesign> completed(const Task& task, const LoopModel& model, LoopAccuracy accuracy) {
    LoopDesign design = designOf(model);
    design.sampleRate = task.settings.sampleRate;
    design.firstPartialHz = task.first().frequency;
    design.turn = task.partials.ends().oneFree() ? -1.0 : 1.0;
    design.accuracy = std::move(accuracy);
    design.accuracy.peakLoopGain = peakGain(design);
    if (!std::isfinite(design.accuracy.worstCents) || !(design.accuracy.peakLoopGain < 1.0))
        return std::nullopt;
    return design;
}

/// A model with its own measure of truth, of which the better is kept.
struct Judged {
    LoopModel model;
    LoopAccuracy accuracy;
};

/// Tunes and measures a model, which takes the place of the one judged where it is better, pitch and T60 together.
void keepBetter(const Task& task, Judged& judged, LoopModel model) {
    if (!tuneExactly(model, task.first()))
        return;
    Judged other{std::move(model), {}};
    other.accuracy = task.measure(other.model);
    const auto badness = [&](const LoopAccuracy& accuracy) {
        return task.miss(accuracy) + accuracy.worstT60Error / goodT60;
    };
    if (badness(other.accuracy) < badness(judged.accuracy))
        judged = std::move(other);
}

/// Phase and loss together.
void fitJointly(const Task& task, Judged& judged, int steps) {
    LoopModel joint = judged.model;
    fit(joint, task.targets, Fitted::both, 2 * steps);
    keepBetter(task, judged, std::move(joint));
}

/// Makes what is missed by more than the mean count more, and less what is missed by less.
void weighByMisses(std::span<LoopTarget> targets, std::span<const double> misses) {
    double sum = 0.0;
    for (const double miss : misses)
        sum += miss * miss;
    const double mean = std::sqrt(sum / static_cast<double>(misses.size()));
    for (std::size_t i = 0; i < targets.size(); ++i)
        targets[i].weight *= std::sqrt(std::clamp(std::abs(misses[i]) / mean, 0.5, 4.0));
}

/// The loss on the damped poles, its error spread evenly: what is worst counts more, round by round.
void fitLossEvenly(LoopTargets targets, LoopModel& model, int steps) {
    constexpr int rounds = 4;
    LoopModel even = model;
    double least = std::numeric_limits<double>::infinity();
    for (int round = 0; round < rounds && least > goodT60; ++round) {
        fit(even, targets, Fitted::loss, steps);
        std::vector<double> misses = lossMisses(even, targets.loss);
        double worst = 0.0;
        for (std::size_t i = 0; i < misses.size(); ++i) {
            misses[i] *= lossImportance(targets.loss[i]);
            worst = std::max(worst, std::abs(misses[i]));
        }
        if (worst < least) {
            least = worst;
            model = even;
        }
        weighByMisses(targets.loss, misses);
    }
}

/// Spreads the error of the phase evenly: what is worst counts more, round by round.
void fitEvenly(const Task& task, Judged& judged, int steps) {
    constexpr int rounds = 6;
    // What lies between the partials only has to stay about in line.
    constexpr double weightBetween = 0.5;
    // The first stays where it is: it is tuned exactly afterwards, and its miss would shift all others.
    constexpr double weightOfFirst = 16.0;
    LoopTargets weighted = task.targets;
    weighted.phase.front().weight = weightOfFirst;
    for (std::size_t i = 1; i < weighted.phase.size(); i += 2)
        weighted.phase[i].weight *= weightBetween;
    LoopModel even = judged.model;
    for (int round = 0; round < rounds && task.miss(judged.accuracy) > 1.0; ++round) {
        const std::vector<double> misses = phaseMisses(even, weighted.phase);
        weighByMisses(std::span(weighted.phase).subspan(1), std::span(misses).subspan(1));
        fit(even, weighted, Fitted::phase, steps);
        if (!tuneExactly(even, task.first()))
            return;
        LoopAccuracy accuracy = task.measure(even);
        if (task.miss(accuracy) < task.miss(judged.accuracy))
            judged = {even, std::move(accuracy)};
    }
}

/// The shelves once more from nothing, for what is to be lost beside this line: its delay is not quite the string's.
void fitLossAnew(const Task& task, Judged& judged, int steps) {
    std::vector<LoopTarget> beside = task.targets.loss;
    const std::vector<double> misses = lossMisses(judged.model, beside);
    for (std::size_t i = 0; i < beside.size(); ++i)
        beside[i].loss = circleLoss(judged.model, beside[i].p.imag()) - misses[i] * beside[i].loss;
    const bool possible =
        std::all_of(beside.begin(), beside.end(), [](const LoopTarget& target) { return target.loss > 0.0; });
    if (!possible)
        return;
    LoopModel anew = judged.model;
    fitLoss(anew, beside, task.goodLoss());
    fitLossEvenly(task.targets, anew, steps);
    fit(anew, task.targets, Fitted::phase, steps, task.goodCost());
    keepBetter(task, judged, std::move(anew));
}

/// The last steps, alike for cold and warm starts: loss on the damped poles, exact first partial, and what
/// helps where that is not true enough.
std::optional<LoopDesign> finish(Task task, LoopModel model, int steps) {
    followBeyond(model, task.targets.loss, task.settings.sampleRate);
    fitLossEvenly(task.targets, model, steps);
    fit(model, task.targets, Fitted::phase, steps, task.goodCost());
    if (!tuneExactly(model, task.first()))
        return std::nullopt;
    Judged judged{model, task.measure(model)};
    if (judged.accuracy.worstT60Error > goodT60)
        fitLossAnew(task, judged, steps);
    const bool fewTargets = task.plan.coveredPartial <= 2 * task.plan.sections + 1;
    if (judged.accuracy.worstT60Error > goodT60 || task.miss(judged.accuracy) > 1.0 || fewTargets)
        fitJointly(task, judged, steps);
    if (task.miss(judged.accuracy) > 1.0)
        fitEvenly(task, judged, steps);
    trimCoverage(judged.accuracy);
    return completed(task, judged.model, std::move(judged.accuracy));
}

/// What a good fit of a string ends at (root mean square, cents), by the sections it has beyond X(n). Where
/// fits go wrong they go wrong by much more.
double usualCents(const LoopPlan& plan) {
    const double spare = plan.sections - plan.needed;
    return std::max(0.01, 0.35 * std::pow(10.0, 0.4 * (1.2 - spare)));
}

/// The best fit of the phase from several starts.
std::optional<LoopModel> fitPhase(const Task& task, const LoopModel& lossy) {
    constexpr int steps = 100;
    const double enough = task.goodCost(), usual = task.cost(usualCents(task.plan));
    std::optional<LoopModel> best;
    double bestCost = std::numeric_limits<double>::infinity();
    const auto goodEnough = [&](const LoopModel& model, double cost) {
        if (cost < bestCost) {
            bestCost = cost;
            best = model;
        }
        return bestCost <= usual;
    };
    // Reach and flatness: over all that the sections can hold, or with some in vain at the top, which short lines want.
    constexpr std::pair<double, double> starts[] = {{1.0, 0.4}, {0.9, 0.4}, {0.8, 0.6}, {0.7, 0.4}, {1.0, 0.7}};
    std::vector<double> endsSeen;
    for (const auto& [reach, flatness] : starts) {
        LoopModel plain = lossy;
        if (!placeSections(plain, task.partials, task.settings.sampleRate, task.plan.coveredPartial,
                           task.plan.sections, reach, flatness))
            continue;
        // First with a plain delay, which may move far from where the placement put it.
        const double plainCost = fit(plain, task.targets, Fitted::phase, steps, enough);
        const auto sameEnd = [&](double seen) { return std::abs(plainCost / seen - 1.0) < 0.02; };
        if (!std::isfinite(plainCost) || std::any_of(endsSeen.begin(), endsSeen.end(), sameEnd))
            continue;
        endsSeen.push_back(plainCost);

        // Then with Thiran's section at the delay found…
        LoopModel split = plain;
        splitDelay(split);
        if (goodEnough(split, fit(split, task.targets, Fitted::phase, steps, enough)))
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
            split = plain;
            split.straightDelay = line;
            split.thiranDelay = 1.0;
            fit(split, task.targets, Fitted::sections, steps / 2, enough);
            if (goodEnough(split, fit(split, task.targets, Fitted::phase, steps, enough)))
                return best;
        }
        if (task.plan.sections == 0)
            break;
    }
    return best;
}

} // namespace

Result<LoopDesign> makeLoop(const string::Partials& partials, const LoopSettings& settings) {
    if (const auto failure = cannotRun(partials, settings))
        return *failure;
    Task task(partials, settings);
    LoopModel lossy;
    fitLoss(lossy, task.targets.loss, task.goodLoss());

    std::optional<LoopDesign> best;
    const auto tryWith = [&](int sections) {
        task.plan.sections = sections;
        const auto model = fitPhase(task, lossy);
        auto design = model ? finish(task, *model, coldSteps) : std::nullopt;
        if (design && (!best || task.miss(design->accuracy) < task.miss(best->accuracy)))
            best = std::move(design);
    };
    // The count planned, and more where that is not true enough.
    const int planned = task.plan.sections;
    const int most =
        std::min({planned + mostExtra, mostSections(settings.quality), task.plan.coveredPartial - 1});
    tryWith(planned);
    for (int sections = planned + 1; sections <= most && !(best && task.miss(best->accuracy) <= 1.0);
         ++sections)
        tryWith(sections);
    // High strings may have no room for all: every section takes delay out of the line.
    for (int sections = planned - 1; sections >= 0 && !best; --sections)
        tryWith(sections);
    if (best)
        return *std::move(best);
    return Failure{"no loop could be fitted to a first partial of " + shortNumber(partials.frequency(1.0)) +
                   " Hz at a sample rate of " + shortNumber(settings.sampleRate) + " Hz"};
}

Result<LoopDesign> retuneLoop(const LoopDesign& neighbour, const string::Partials& partials,
                              const LoopSettings& settings) {
    if (const auto failure = cannotRun(partials, settings))
        return *failure;
    Task task(partials, settings);
    const int sections = static_cast<int>(neighbour.sections.size());
    const bool sameKind = neighbour.sampleRate == settings.sampleRate && neighbour.gain < 1.0 &&
                          (neighbour.turn < 0.0) == partials.ends().oneFree();
    if (!sameKind || sections < task.plan.sections || sections > task.plan.sections + mostExtra)
        return makeLoop(partials, settings);
    task.plan.sections = sections;

    // As true as the neighbour within so much more of its error, or well within what the quality is to keep; and true
    // at all where the neighbour was.
    constexpr double wellWithin = 0.5;
    const LoopAccuracy& known = neighbour.accuracy;
    const auto trueEnough = [&](const LoopAccuracy& accuracy, double more) {
        const double cents = (1.0 + more) * known.worstCents + 0.2 * more;
        return (accuracy.worstCents <= std::min(cents, std::max(trueCents, known.worstCents)) ||
                task.miss(accuracy) <= wellWithin) &&
               accuracy.worstT60Error <= (1.0 + more) * known.worstT60Error + 0.02 * more;
    };
    LoopModel model = scaled(modelOf(neighbour), task.first().frequency / neighbour.firstPartialHz);
    if (model.delay() >= leastDelay && tuneExactly(model, task.first())) {
        // Another tension changes every partial alike, and the loop is ready as it stands.
        LoopAccuracy accuracy = task.measure(model);
        trimCoverage(accuracy);
        std::optional<LoopDesign> design;
        if (trueEnough(accuracy, 0.2))
            design = completed(task, model, std::move(accuracy));
        else if (design = finish(task, model, warmSteps); design && !trueEnough(design->accuracy, 0.5))
            design.reset();
        if (design)
            return *std::move(design);
    }
    return makeLoop(partials, settings);
}

} // namespace hitchpin::design
