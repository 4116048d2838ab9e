#include "dsp/design/AllpassPlacement.h"

#include "dsp/design/LoopTargets.h"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace hitchpin::design {

namespace {

constexpr double pi = std::numbers::pi;
constexpr double highestShareOfRate = 0.45;

/// A pole pair at angle ±θ whose group delay holds 2π within θ ± Δ and has fallen to β of its peak at the
/// edges.
AllpassSection sectionOver(double from, double to, double flatness) {
    const double theta = 0.5 * (from + to), half = 0.5 * (to - from);
    const double eta = (1.0 - flatness * std::cos(half)) / (1.0 - flatness);
    const double radius = eta - std::sqrt(eta * eta - 1.0);
    const double a1 = -2.0 * radius * std::cos(theta), a2 = radius * radius, atHalfRate = 1.0 - a1 + a2;
    return {(1.0 + a1 + a2) / atHalfRate, 2.0 * (1.0 - a2) / atHalfRate};
}

} // namespace

bool placeSections(LoopModel& model, const string::Partials& partials, double sampleRate, int coveredPartial,
                   int sections, double reach, double flatness, double share, double lead) {
    const auto angle = [&](double n) { return 2.0 * pi * partials.frequency(n) / sampleRate; };
    const auto turns = [&](double n) {
        return share * (partials.ends().oneFree() ? n - 0.5 : n) + lead * angle(n) / (2.0 * pi);
    };
    const auto needed = [&](double n) { return share * sectionsNeeded(partials, n); };

    // n_c: how far the sections' phase reaches.
    double last = coveredPartial;
    const double wanted = reach * sections;
    while (needed(last) < wanted &&
           partials.frequency(last * 1.02 + 0.01) < highestShareOfRate * sampleRate)
        last = last * 1.02 + 0.01;
    const double lastAngle = angle(last), lastDelay = share * sampleRate / partials.slope(last) + lead;

    // Sections beyond what the string needs are spread up to half the rate.
    const bool spread = sections > needed(last);
    const double straight =
        spread ? (2.0 * pi * turns(last) + lastDelay * (pi - lastAngle) - 2.0 * pi * sections) / pi
               : 2.0 * pi * (turns(last) - sections) / lastAngle;
    if (!(straight > 0.0))
        return false;
    model.straightDelay = straight;
    model.thiranDelay = 0.0;

    const double firstAngle = angle(1.0), firstArea = 2.0 * pi * turns(1.0) - straight * firstAngle;
    const auto areaUpTo = [&](double n) { return 2.0 * pi * turns(n) - straight * angle(n); };
    const double lastArea = areaUpTo(last);
    const auto angleOfArea = [&](double area) {
        if (area <= firstArea)
            return firstAngle * area / firstArea;
        if (area >= lastArea)
            return std::min(pi, lastAngle + (area - lastArea) / std::max(1e-9, lastDelay - straight));
        double low = 1.0, high = last;
        for (int i = 0; i < 40; ++i) {
            const double middle = 0.5 * (low + high);
            (areaUpTo(middle) < area ? low : high) = middle;
        }
        return angle(0.5 * (low + high));
    };
    model.sections.clear();
    double from = 0.0;
    for (int k = 1; k <= sections; ++k) {
        const double to = k == sections ? (spread ? pi : lastAngle) : angleOfArea(2.0 * pi * k);
        if (!(to > from))
            return false;
        model.sections.push_back(sectionOver(from, to, flatness));
        from = to;
    }
    return true;
}

} // namespace hitchpin::design
