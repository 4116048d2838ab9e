#include "dsp/design/LoopTargets.h"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace hitchpin::design {

namespace {

constexpr double pi = std::numbers::pi;

/// Shares of the sample rate up to which partials are followed, and up to which their decay is looked after.
constexpr double coveredShareOfRate = 0.42;
constexpr double usableShareOfRate = 0.45;
/// Hz: above this not even the first partials of a high string need to be true.
constexpr double highestWanted = 17000.0;
/// Hz: what rings higher is not heard.
constexpr double hearing = 20000.0;
/// A loss this small (nepers a round) rings for days; it stands in for none, which could not be fitted in
/// ratio.
constexpr double leastLoss = 1e-9;

/// The first partial will be tuned exactly, and what the fit leaves there would shift all others.
constexpr double firstWeight = 4.0;
/// Nepers a round: what dies faster is gone within a few periods, and no shelf needs to say how fast.
constexpr double mostLoss = 1.0;

struct Ambition {
    double reachHz;    ///< partials are followed up to here…
    int mostPartials;  ///< …or to this one
    int leastPartials; ///< but the first few also above `reachHz`
    int mostSections;
    double margin; ///< sections beyond X(n)
};

constexpr Ambition live{10000.0, 120, 4, 12, 1.3};
constexpr Ambition reference{16000.0, 128, 6, 60, 4.0};

/// With fewer sections to spare than this the fit gets coarse (some cents).
constexpr double leastMargin = 1.2;

} // namespace

LoopTarget targetAt(const string::Partials& partials, double sampleRate, double number) {
    LoopTarget target{};
    target.number = number;
    target.weight = 1.0;
    target.turns = partials.ends().oneFree() ? number - 0.5 : number;
    target.frequency = partials.frequency(number);
    target.decayRate = partials.decayRate(number);
    const double period = 1.0 / partials.slope(number);
    target.decayRate = std::max(target.decayRate, leastLoss / period);
    target.p = {-target.decayRate / sampleRate, 2.0 * pi * target.frequency / sampleRate};
    target.s = std::tanh(0.5 * target.p);
    target.groupDelay = sampleRate * period;
    target.loss = target.decayRate * period;
    return target;
}

double sectionsNeeded(const string::Partials& partials, double number) {
    const double turns = partials.ends().oneFree() ? number - 0.5 : number;
    return std::max(0.0, turns - partials.frequency(number) / partials.slope(number));
}

int mostSections(Quality quality) {
    return (quality == Quality::live ? live : reference).mostSections;
}

LoopPlan planLoop(const string::Partials& partials, const LoopSettings& settings) {
    const Ambition& aim = settings.quality == Quality::live ? live : reference;
    const double highest = coveredShareOfRate * settings.sampleRate;

    LoopPlan plan;
    plan.needed = sectionsNeeded(partials, 1.0);
    for (int n = 2; n <= aim.mostPartials; ++n) {
        const double frequency = partials.frequency(n);
        const bool wanted = n <= aim.leastPartials ? frequency <= highestWanted : frequency <= aim.reachHz;
        if (frequency > highest || !wanted)
            break;
        const double more = std::max(plan.needed, sectionsNeeded(partials, n));
        if (more > aim.mostSections - leastMargin)
            break;
        plan.coveredPartial = n;
        plan.needed = more;
    }
    plan.sections = std::min(aim.mostSections, static_cast<int>(std::ceil(plan.needed + aim.margin)));
    // Two unknowns a section and the delay must not outnumber the targets at n = 1, 1.5, 2, …
    plan.sections = std::min(plan.sections, plan.coveredPartial - 1);
    return plan;
}

std::vector<LoopTarget> phaseTargets(const string::Partials& partials, double sampleRate,
                                     int coveredPartial) {
    std::vector<LoopTarget> targets;
    for (int half = 2; half <= 2 * coveredPartial; ++half)
        targets.push_back(targetAt(partials, sampleRate, 0.5 * half));
    targets.front().weight = firstWeight;
    return targets;
}

std::vector<LoopTarget> lossTargets(const string::Partials& partials, double sampleRate, int coveredPartial) {
    std::vector<LoopTarget> targets;
    const double step = coveredPartial < 4 ? 0.5 : 1.0 + coveredPartial / 40;
    for (double n = 1.0; n <= coveredPartial; n += coveredPartial >= 4 && n < 12.0 ? 1.0 : step)
        targets.push_back(targetAt(partials, sampleRate, n));
    // Beyond, the loop goes on with the delay that it has there, and its poles fall behind the string's.
    const LoopTarget last = targets.back();
    for (double n = coveredPartial * 1.15 + 1.0; partials.frequency(n) < hearing; n *= 1.15) {
        LoopTarget beyond = targetAt(partials, sampleRate, n);
        const double angle =
            std::min(beyond.p.imag(), last.p.imag() + 2.0 * pi * (n - last.number) / last.groupDelay);
        if (angle > 2.0 * pi * usableShareOfRate)
            break;
        beyond.beyond = true;
        beyond.p = {0.0, angle};
        beyond.s = {0.0, std::tan(0.5 * angle)};
        beyond.groupDelay = std::max(beyond.groupDelay, last.groupDelay);
        beyond.loss = beyond.decayRate * beyond.groupDelay / sampleRate;
        if (beyond.loss > mostLoss && beyond.frequency > t60CountsUpTo)
            break;
        targets.push_back(beyond);
    }
    return targets;
}

} // namespace hitchpin::design
