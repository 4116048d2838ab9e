#include "Source/report/Schedule.h"

#include "Source/report/Digits.h"
#include "Source/report/Warnings.h"

#include <algorithm>

namespace hitchpin::report {

namespace {

std::string coreInWords(const string::Core& core) {
    return core.material.name + " " + measure(core.diameter * 1e3) + " mm" +
           (core.shape == string::CoreShape::hex ? " hex" : "");
}

std::string windingsInWords(const std::vector<string::Winding>& windings) {
    std::string words;
    for (const auto& winding : windings) {
        words += words.empty() ? "" : ", ";
        words += winding.material.name + " ";
        if (winding.shape == string::WindingShape::round)
            words += measure(winding.diameter * 1e3) + " mm round";
        else
            words += measure(winding.thickness * 1e3) + " x " + measure(winding.width * 1e3) + " mm flat";
    }
    return words;
}

ScheduleRow row(const design::CourseDescription& course, const document::Instrument& instrument) {
    const auto& string = course.strings.front();
    const auto& statics = string.statics;
    ScheduleRow row;
    row.note = course.name;
    row.pitchHz = string.partials.frequency(1);
    row.strings = static_cast<int>(course.strings.size());
    row.speakingLengthMm = string.description.speakingLength * 1e3;
    row.core = coreInWords(string.description.build.core);
    row.windings = windingsInWords(string.description.build.windings);
    row.outerDiameterMm = statics.outerDiameter * 1e3;
    row.linearDensityKgM = statics.linearDensity;
    row.tensionN = statics.tension;
    for (const auto& each : course.strings)
        row.courseTensionN += each.statics.tension;
    row.stressMpa = statics.stress * 1e-6;
    row.breakingLoadN = statics.breakingLoad;
    row.breakingShare = statics.breakingShare;
    row.workingShare = workingShare(string.description.build, instrument);
    row.semitonesToBreaking = statics.semitonesToBreaking;
    row.stretchMm = statics.stretch * 1e3;
    row.inharmonicity = statics.inharmonicity;
    row.impedanceKgS = statics.impedance;
    row.longitudinalHz = statics.longitudinalHz;
    for (int n = 1; n <= partialsListed; ++n) {
        row.partialsHz.push_back(string.partials.frequency(n));
        row.decayT60S.push_back(string.partials.t60(n));
    }
    row.warnings = courseWarnings(course, instrument);
    return row;
}

} // namespace

Schedule makeSchedule(const document::Instrument& instrument, const document::Described& described) {
    Schedule schedule;
    schedule.instrument = described.instrument.name;
    for (const auto& bridge : described.instrument.bridges)
        schedule.tensionByBridgeN.emplace_back(bridge.name, 0.0);
    for (const auto& course : described.instrument.courses) {
        schedule.courses.push_back(row(course, instrument));
        const double tension = schedule.courses.back().courseTensionN;
        schedule.totalTensionN += tension;
        schedule.tensionByBridgeN[static_cast<std::size_t>(course.bridge)].second += tension;
    }
    schedule.warnings = breakWarnings(described.instrument);
    const bool anyOver = std::any_of(schedule.courses.begin(), schedule.courses.end(),
                                     [](const auto& course) { return course.breakingShare > course.workingShare; });
    for (auto& caution : cautions(anyOver))
        schedule.warnings.push_back(std::move(caution));
    return schedule;
}

} // namespace hitchpin::report
