#include "Source/report/Warnings.h"

#include "Source/report/Digits.h"

#include <algorithm>
#include <cmath>

namespace hitchpin::report {

namespace {

std::string percent(double share) { return fixed(100.0 * share, 0) + " %"; }

/// What keeps the string within a share: at its pitch a shorter length, at its length a lower pitch, each from the
/// string at that tension (a string far over it is thinner by its stretch, so no rule of squares would do).
std::string advice(const string::Strung& strung, double share) {
    const bool plain = strung.description.build.windings.empty();
    const double tension = share * strung.statics.breakingLoad, pitch = strung.partials.frequency(1);
    const auto shorter = string::cutToPitch(strung.description, pitch, tension, 1);
    const auto lower = string::strungToTension(strung.description, tension, 1);
    std::string words = "within " + percent(share);
    if (shorter)
        words += " at this pitch it may speak " +
                 fixed(std::floor(shorter->description.speakingLength * 1e3), 0) + " mm,";
    if (lower)
        words += " at this length " +
                 fixed(std::ceil(120.0 * std::log2(pitch / lower->partials.frequency(1))) / 10.0, 1) + " semitones lower;";
    words += " or take a stronger material";
    // Stress of a plain string is 4ρL²f², whatever its gauge, and thicker wire is weaker.
    words += plain ? " (a thicker string would not help)" : " or a lighter winding";
    return words;
}

void addStringWarnings(const string::Strung& strung, double usual, const std::string& who,
                       std::vector<std::string>& warnings) {
    const auto& statics = strung.statics;
    if (statics.breakingShare > 1.0)
        warnings.push_back(who + "would break: " + threeDigits(statics.tension) + " N on a breaking load of " +
                           threeDigits(statics.breakingLoad) + " N, " + fixed(-statics.semitonesToBreaking, 1) +
                           " semitones over; " + advice(strung, usual));
    else if (statics.breakingShare > usual)
        warnings.push_back(who + "over the usual working share: " + percent(statics.breakingShare) +
                           " of breaking where " + percent(usual) + " is usual; " + advice(strung, usual));
    else if (statics.breakingShare < slackShare)
        warnings.push_back(who + "very slack: " + fixed(100.0 * statics.breakingShare, 1) + " % of breaking");
}

const string::Strung& first(const design::CourseDescription& course) { return course.strings.front(); }

/// What changes between two neighbours, in words; empty where it is no break.
std::string breakInWords(const design::CourseDescription& low, const design::CourseDescription& high,
                         const design::InstrumentDescription& instrument) {
    const auto& a = first(low).description.build;
    const auto& b = first(high).description.build;
    const auto name = [](const string::Build& build) {
        static const char* kinds[] = {"plain", "wound", "double wound"};
        return std::string(kinds[std::min<std::size_t>(build.windings.size(), 2)]);
    };
    std::string words;
    if (a.windings.size() != b.windings.size())
        words = name(a) + " to " + name(b);
    else if (a.core.material.name != b.core.material.name)
        words = a.core.material.name + " to " + b.core.material.name;
    if (low.bridge != high.bridge)
        words += (words.empty() ? "" : ", ") + std::string("bridge ") +
                 instrument.bridges[static_cast<std::size_t>(low.bridge)].name + " to " +
                 instrument.bridges[static_cast<std::size_t>(high.bridge)].name;
    return words;
}

double factor(double a, double b) { return a > b ? a / b : b / a; }

} // namespace

double workingShare(const string::Build& build, const document::Instrument& instrument) {
    const auto& material = build.core.material;
    const bool own = std::any_of(instrument.materials.begin(), instrument.materials.end(),
                                 [&](const auto& named) { return named.first == material.name; });
    return build.windings.empty() || own ? material.workingShare : std::min(material.workingShare, woundWorkingShare);
}

std::vector<std::string> courseWarnings(const design::CourseDescription& course,
                                        const document::Instrument& instrument) {
    std::vector<std::string> all;
    for (std::size_t i = 0; i < course.strings.size(); ++i) {
        const auto& strung = course.strings[i];
        std::vector<std::string> warnings;
        addStringWarnings(strung, workingShare(strung.description.build, instrument), "", warnings);
        // Strings alike share one warning; where they differ, each is named.
        for (auto& warning : warnings) {
            const bool alike = std::any_of(course.strings.begin(), course.strings.begin() + static_cast<long>(i),
                                           [&](const auto& before) {
                                               return std::abs(before.statics.breakingShare -
                                                               strung.statics.breakingShare) < 0.005;
                                           });
            if (!alike)
                all.push_back(i == 0 ? warning : "string " + std::to_string(i + 1) + ": " + warning);
        }
    }
    return all;
}

std::vector<std::string> breakWarnings(const design::InstrumentDescription& instrument) {
    std::vector<const design::CourseDescription*> byPitch;
    for (const auto& course : instrument.courses)
        byPitch.push_back(&course);
    std::stable_sort(byPitch.begin(), byPitch.end(), [](auto* a, auto* b) { return a->openHz < b->openHz; });
    std::vector<std::string> warnings;
    for (std::size_t i = 1; i < byPitch.size(); ++i) {
        const auto &low = *byPitch[i - 1], &high = *byPitch[i];
        const auto what = breakInWords(low, high, instrument);
        if (what.empty() || low.openHz == high.openHz)
            continue;
        const auto where = "break from " + low.name + " to " + high.name + " (" + what + "): ";
        const auto &a = first(low).statics, &b = first(high).statics;
        if (const double jump = b.tension / a.tension - 1.0; factor(a.tension, b.tension) - 1.0 > breakTensionJump)
            warnings.push_back(where + "tension jumps by " +
                               (std::abs(jump) < 1.0 ? fixed(100.0 * jump, 0) + " %"
                                                     : "a factor of " + threeDigits(b.tension / a.tension)) +
                               ", from " +
                               threeDigits(a.tension) + " N to " + threeDigits(b.tension) + " N a string");
        if (a.inharmonicity > 0 && b.inharmonicity > 0 &&
            factor(a.inharmonicity, b.inharmonicity) > breakInharmonicityFactor)
            warnings.push_back(where + "inharmonicity jumps by a factor of " +
                               fixed(factor(a.inharmonicity, b.inharmonicity), 1) + ", from " + small(a.inharmonicity) +
                               " to " + small(b.inharmonicity));
    }
    return warnings;
}

std::vector<std::string> cautions(bool anyOverWorkingShare) {
    std::vector<std::string> all;
    if (anyOverWorkingShare)
        all.push_back("strings break and store energy: wear eye protection, raise the pitch in stages, and stand clear "
                      "of the string's plane; strength falls by 10 to 20 % at loops, coils and knots");
    all.push_back("the total tension is not yet the load on a frame or board: these are estimates, not a structural "
                  "approval; old or wooden frames are for someone qualified to judge");
    return all;
}

} // namespace hitchpin::report
