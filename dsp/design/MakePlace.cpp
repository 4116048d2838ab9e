#include "dsp/design/MakePlace.h"

#include "dsp/design/AllpassPlacement.h"
#include "dsp/design/LoopFit.h"
#include "dsp/design/LoopModel.h"
#include "dsp/design/LoopTargets.h"
#include "dsp/design/LossFit.h"
#include "dsp/design/Sections.h"
#include "dsp/string/Places.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>

namespace hitchpin::design {

namespace {

using Complex = std::complex<double>;
constexpr double pi = std::numbers::pi;

/// Up to this partial a place has to be true; higher ones count less.
constexpr int trueUpTo = 20;
constexpr double weightBeyond = 0.3;
/// A partial under this share of its level at an antinode has its node there, as good as.
constexpr double nearNode = 0.1;
/// Errors count by how they change the level of a partial, and at a node as if that were its level.
constexpr double nodeCountsAs = 0.02;
/// dB: what needs no further search, well within the goals of 0.5 dB and −60 dB.
constexpr double goodLevelDb = 0.1, goodNullDb = -66.0;
/// Sections beyond the side's share of X(n), and how many more are tried where those do not suffice.
constexpr double margin = 2.0;
constexpr int mostExtra = 3;
/// Per cent of the side's loss: where that is a tenth of a neper this is −60 dB.
constexpr double goodLossPercent = 1.5;
/// A side shorter than this is none.
constexpr double leastShare = 1e-4;
/// Nepers: a level that falls by less over the whole range is flat.
constexpr double flatLevel = 1e-3;
constexpr double leastLevelLoss = 1e-9;
/// Per cent of its logarithm that a level may be off, root mean square.
constexpr double goodLevelPercent = 2.0;

/// One side of one string.
struct Task {
    const string::Partials& partials;
    const LoopDesign& loop;
    string::Side side;
    double share;
    double sign; ///< with which S enters the level
    LoopTargets even;    ///< every miss counts alike
    LoopTargets targets; ///< by what a miss does to the level

    Task(const string::Partials& asked, const LoopDesign& designed, double ratio)
        : partials(asked), loop(designed), side(ratio <= 0.5 ? string::Side::bridge : string::Side::nut),
          share(std::min(ratio, 1.0 - ratio)), sign(string::turnAt(string::endOf(asked.ends(), side))) {
        const LoopModel model = modelOf(loop);
        const int covered = std::max(1, loop.accuracy.coveragePartial);
        // Half partials only where whole ones are few: phase that runs this slowly hides nothing between them.
        const double step = covered <= trueUpTo ? 0.5 : 1.0;
        for (double n = 1.0; n <= covered; n += n < trueUpTo ? step : 2.0)
            addTarget(model, n);
    }

    /// The loop's own pole there, with the side's share of its phase and loss. Residuals of a fit are milliradians
    /// and thousandths of a neper.
    void addTarget(const LoopModel& model, double n) {
        LoopTarget target = targetAt(partials, loop.sampleRate, n);
        if (const Complex pole = loopPole(model, target.turns, target.p); !std::isnan(pole.imag())) {
            target.p = pole;
            target.s = std::tanh(0.5 * pole);
        }
        target.turns = string::turnsOfSide(partials, side, share, n);
        target.groupDelay *= share;
        target.loss *= share;
        constexpr double centsPerNeper = 1200.0 / std::numbers::ln2;
        const auto add = [&](LoopTargets& to, double weight) {
            target.weight = 1000.0 * weight * target.p.imag() * target.groupDelay / centsPerNeper;
            to.phase.push_back(target);
            // A node is one above 6 kHz too, where decays count less.
            target.weight = 1000.0 * weight * target.loss * percentPerCent / 100.0;
            target.weight *= target.weight / lossWeight(target);
            to.loss.push_back(target);
        };
        const double counts = n <= trueUpTo ? 1.0 : weightBeyond;
        add(even, counts);
        add(targets, n <= trueUpTo && n == std::floor(n) ? 1.0 / (levelAt(wanted(target)) + nodeCountsAs) : counts);
    }
    void setLead(double samples) { even.lead = targets.lead = samples; }

    static Complex wanted(const LoopTarget& target) { return std::polar(1.0, -2.0 * pi * target.turns); }
    /// Of a partial at the place over its level at an antinode.
    double levelAt(Complex s) const { return 0.5 * std::abs(1.0 + sign * s); }
    double cost(double milliradians) const {
        return milliradians * milliradians * static_cast<double>(targets.phase.size());
    }
};

/// Where S of the model lies from where it should, at the poles of the loop.
PlaceAccuracy measure(const Task& task, const LoopModel& model) {
    PlaceAccuracy accuracy;
    accuracy.worstNullDb = -200.0;
    for (const LoopTarget& target : task.targets.phase) {
        if (target.number > trueUpTo || target.number != std::floor(target.number))
            continue;
        const Complex wanted = Task::wanted(target);
        const Complex s = std::exp(logLine(model, target.p, target.s) + logLoss(model, target.s) +
                                   task.targets.lead * target.p);
        const double level = task.levelAt(wanted);
        if (level < nearNode)
            accuracy.worstNullDb = std::max(accuracy.worstNullDb, 20.0 * std::log10(0.5 * std::abs(s - wanted)));
        else
            accuracy.worstLevelDb =
                std::max(accuracy.worstLevelDb, std::abs(20.0 * std::log10(task.levelAt(s) / level)));
    }
    return accuracy;
}

struct Judged {
    LoopModel model;
    double lead = 0.0;
    PlaceAccuracy accuracy{std::numeric_limits<double>::infinity(), 0.0};
    /// Over 1: not good enough.
    double badness = std::numeric_limits<double>::infinity();
};

Judged judged(const Task& task, const LoopModel& model) {
    Judged result{model, task.targets.lead, measure(task, model)};
    result.badness = std::max(result.accuracy.worstLevelDb / goodLevelDb,
                              std::pow(10.0, (result.accuracy.worstNullDb - goodNullDb) / 20.0));
    return result;
}

/// Shelves for the side's share of the loss.
LoopModel lossySide(const Task& task) {
    std::vector<LoopTarget> targets = task.targets.loss;
    for (LoopTarget& target : targets)
        target.weight = 1.0;
    LoopModel model;
    fitLoss(model, targets, goodLossPercent);
    return model;
}

/// From a plain delay that may move far to whole samples and Thiran's section, first evenly and then by what counts.
Judged fitFrom(Task& task, LoopModel model, int steps) {
    const double enough = task.cost(0.1);
    fit(model, task.even, Fitted::phase, steps, enough);
    splitDelay(model);
    fit(model, task.targets, Fitted::phase, steps, enough);
    // Where Thiran's section was pulled to an end of its range the line has a sample too many or too few.
    if (model.thiranDelay > longestThiran - 0.01 || model.thiranDelay < shortestThiran + 0.01) {
        model.straightDelay += model.thiranDelay > 1.0 ? 1.0 : -1.0;
        model.thiranDelay = 1.0;
        fit(model, task.even, Fitted::phase, steps, enough);
    }
    Judged best;
    // What still is at its node too much counts more, round by round.
    LoopTargets weighted = task.targets;
    for (int round = 0; round < 3 && best.badness > 1.0; ++round) {
        fit(model, weighted, Fitted::loss, steps, enough);
        fit(model, weighted, Fitted::phase, steps, enough);
        if (Judged next = judged(task, model); next.badness < best.badness)
            best = std::move(next);
        for (auto* rows : {&weighted.phase, &weighted.loss})
            for (LoopTarget& target : *rows)
                if (task.levelAt(Task::wanted(target)) < nearNode)
                    target.weight *= 3.0;
    }
    return best;
}

LoopModel modelFrom(double gain, double thiran, const std::vector<LossShelf>& shelves,
                    const std::vector<AllpassSection>& sections) {
    LoopDesign filters;
    filters.gain = gain;
    filters.thiran = thiran;
    filters.shelves = shelves;
    filters.sections = sections;
    return modelOf(filters);
}

/// As it stands or after a few steps; its badness tells whether that did.
Judged fitFromNeighbour(Task& task, const PlaceDesign& neighbour) {
    constexpr int steps = 8;
    const double ratio = task.loop.firstPartialHz / neighbour.firstPartialHz;
    LoopModel model =
        scaled(modelFrom(neighbour.gain, neighbour.thiran, neighbour.shelves, neighbour.sections), ratio);
    task.setLead(2.0 * static_cast<double>(model.sections.size()) + 2.0);
    const double delay = (neighbour.delay + thiranDelay(neighbour.thiran)) / ratio + task.targets.lead;
    model.straightDelay = std::round(delay - model.thiranDelay);
    model.thiranDelay = delay - model.straightDelay;
    if (model.thiranDelay < shortestThiran || model.thiranDelay > longestThiran)
        splitDelay(model);

    Judged best = judged(task, model);
    if (best.badness <= 1.0)
        return best;
    fit(model, task.targets, Fitted::loss, steps);
    fit(model, task.targets, Fitted::phase, steps);
    return judged(task, model);
}

Judged fitSide(Task& task) {
    constexpr int steps = 30;
    constexpr double reach = 0.9;
    const LoopModel lossy = lossySide(task);
    const int covered = std::max(1, task.loop.accuracy.coveragePartial);
    // Near half the rate a Thiran section alone leaves gaps between whole samples: one section is always there.
    const int most = std::max(1, (static_cast<int>(task.targets.phase.size()) - 1) / 2);
    const int planned =
        std::min(most, static_cast<int>(std::ceil(task.share * sectionsNeeded(task.partials, covered) + margin)));
    Judged best;
    const auto tryWith = [&](int sections) {
        task.setLead(2.0 * sections + 2.0);
        for (const double flatness : {0.5, 0.7}) {
            LoopModel model = lossy;
            if (!placeSections(model, task.partials, task.loop.sampleRate, covered, sections, reach, flatness,
                               task.share, task.targets.lead))
                continue;
            Judged next = fitFrom(task, std::move(model), steps);
            if (next.badness < best.badness)
                best = std::move(next);
            if (best.badness <= 1.0 || sections == 0)
                break;
        }
    };
    for (int sections = planned; sections <= std::min(most, planned + mostExtra) && best.badness > 1.0; ++sections)
        tryWith(sections);
    for (int sections = planned - 1; sections >= 0 && std::isinf(best.badness); --sections)
        tryWith(sections);
    return best;
}

/// Shelves for a level that falls with frequency.
void fitLevel(PlaceDesign& place, const string::Partials& partials, double sampleRate, int covered, PlaceUse use,
              const PlaceDesign* neighbour) {
    std::vector<LoopTarget> targets;
    double most = 0.0;
    for (double n = 1.0; n <= covered; n = std::max(n + 0.5, n * 1.15)) {
        LoopTarget target = targetAt(partials, sampleRate, n);
        target.p = {0.0, target.p.imag()};
        target.s = {0.0, std::tan(0.5 * target.p.imag())};
        target.loss = -std::log(use == PlaceUse::plucked ? string::releaseLevel(partials, n)
                                                         : string::velocityLevel(partials, n));
        target.loss = std::max(target.loss, leastLevelLoss);
        most = std::max(most, target.loss);
        targets.push_back(target);
    }
    if (most < flatLevel)
        return;
    // What counts is the level itself, not its share of how far it falls; as much above 6 kHz as below.
    for (LoopTarget& target : targets) {
        target.weight = std::max(0.1, target.loss / most);
        target.weight *= target.weight / lossWeight(target);
    }
    const auto fits = [&](const LoopModel& model) {
        return std::all_of(targets.begin(), targets.end(), [&](const LoopTarget& target) {
            return std::abs(logLoss(model, target.s).real() + target.loss) <=
                   0.01 * goodLevelPercent * target.loss + flatLevel;
        });
    };
    LoopModel model;
    if (neighbour != nullptr)
        model = modelFrom(neighbour->levelGain, 1.0, neighbour->level, {});
    if (model.shelves.empty() || !fits(model))
        fitLoss(model, targets, goodLevelPercent);
    const LoopDesign fitted = designOf(model);
    place.levelGain = fitted.gain;
    place.level = fitted.shelves;
}

} // namespace

PlaceDesign makePlace(const string::Partials& partials, const LoopDesign& loop, PlaceUse use, double ratio,
                      const PlaceDesign* neighbour) {
    PlaceDesign place;
    place.firstPartialHz = loop.firstPartialHz;
    place.ratio = std::clamp(ratio, 0.0, 1.0);
    if (neighbour != nullptr && neighbour->ratio != place.ratio)
        neighbour = nullptr;
    fitLevel(place, partials, loop.sampleRate, std::max(1, loop.accuracy.coveragePartial), use, neighbour);

    // At an end there is no side to be fitted.
    if (std::min(place.ratio, 1.0 - place.ratio) < leastShare)
        return place;
    Task task(partials, loop, place.ratio);
    Judged best;
    if (neighbour != nullptr)
        best = fitFromNeighbour(task, *neighbour);
    if (best.badness > 1.0)
        if (Judged fresh = fitSide(task); fresh.badness < best.badness)
            best = std::move(fresh);
    const LoopDesign filters = designOf(best.model);
    place.delay = filters.delay - static_cast<int>(best.lead);
    place.thiran = filters.thiran;
    place.gain = filters.gain;
    place.shelves = filters.shelves;
    place.sections = filters.sections;
    place.accuracy = best.accuracy;
    return place;
}

} // namespace hitchpin::design
