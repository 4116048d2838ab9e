#include "dsp/design/LoopReport.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>

namespace hitchpin::design {

namespace {

using Complex = std::complex<double>;
constexpr double centsPerNeper = 1200.0 / std::numbers::ln2;

/// The report goes at least this far, also where the fit does not, and to this one while its T60 counts.
constexpr int leastReported = 64, mostReported = 128;
constexpr double reportedShareOfRate = 0.45;
/// Partials at the end of the covered ones that may be given up.
constexpr int mostTrimmed = 3;

/// Worst errors over the covered partials; a partial without a pole must not pass for a true one.
void summarise(LoopAccuracy& accuracy) {
    accuracy.worstCents = accuracy.meanCents = accuracy.worstT60Error = 0.0;
    int found = 0;
    for (const LoopAccuracy::PartialError& error : accuracy.partials) {
        if (error.number > accuracy.coveragePartial)
            break;
        ++found;
        if (error.targetHz <= t60CountsUpTo)
            accuracy.worstT60Error = std::max(accuracy.worstT60Error, std::abs(error.t60Ratio - 1.0));
        accuracy.coverageHz = error.targetHz;
        accuracy.worstCents = std::max(accuracy.worstCents, std::abs(error.cents));
        accuracy.meanCents += error.cents * error.cents;
    }
    accuracy.meanCents = std::sqrt(accuracy.meanCents / std::max(1, found));
    if (found < accuracy.coveragePartial)
        accuracy.worstCents = std::numeric_limits<double>::infinity();
}

} // namespace

LoopAccuracy measureLoop(const LoopModel& model, const string::Partials& partials, double sampleRate,
                         const LoopPlan& plan) {
    LoopAccuracy accuracy;
    accuracy.coveragePartial = plan.coveredPartial;
    double cents = 0.0;
    for (int n = 1; n <= mostReported; ++n) {
        const LoopTarget target = targetAt(partials, sampleRate, n);
        const bool counts = n <= leastReported || target.frequency <= t60CountsUpTo;
        if (n > plan.coveredPartial && !(counts && target.frequency <= reportedShareOfRate * sampleRate))
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

} // namespace hitchpin::design
