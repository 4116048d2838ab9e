#include "Source/report/Schedule.h"

#include "Source/report/Digits.h"
#include "Source/report/Warnings.h"
#include "dsp/board/OnBoard.h"

#include <algorithm>
#include <cmath>

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

/// What pulls, and by how much: the mode that lies nearest.
std::string wolfInWords(const design::InstrumentDescription& described, const design::CourseDescription& course,
                        const board::PartialOnBoard& onBoard) {
    const auto& modes = design::boardOf(described, course).modes;
    const double hz = course.strings.front().partials.frequency(1);
    const auto nearest = std::min_element(modes.begin(), modes.end(), [&](const auto& a, const auto& b) {
        return std::abs(std::log(a.frequency / hz)) < std::abs(std::log(b.frequency / hz));
    });
    std::string words = "wolf: ";
    if (nearest != modes.end())
        words += "the board's resonance at " + fixed(nearest->frequency, 0) + " Hz ";
    else
        words += "the bridge ";
    return words + "pulls its pitch by " + fixed(onBoard.shift, 0) + " cents and its ring time to " +
           threeDigits(onBoard.t60) + " s; it is tuned alone";
}

ScheduleRow row(const design::InstrumentDescription& described, std::size_t index,
                const document::Instrument& instrument) {
    const auto& course = described.courses[index];
    const auto& string = course.strings.front();
    const auto& statics = string.statics;
    ScheduleRow row;
    row.note = course.name;
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
    row.warnings = courseWarnings(course, instrument);
    const auto mobility = design::mobilityFor(described, index, 0);
    for (int n = 1; n <= partialsListed; ++n) {
        row.partialsHz.push_back(string.partials.frequency(n));
        row.decayT60S.push_back(string.partials.t60(n));
        const auto onBoard = board::partialOnBoard(string.partials, statics.impedance, mobility, n);
        row.boardT60S.push_back(onBoard.t60);
        if (n > 1)
            continue;
        row.pitchHz = onBoard.frequency;
        row.boardShiftCents = onBoard.shift;
        if (board::isWolf(onBoard))
            row.warnings.push_back(wolfInWords(described, course, onBoard));
    }
    return row;
}

} // namespace

Schedule makeSchedule(const document::Instrument& instrument, const document::Described& described) {
    Schedule schedule;
    schedule.instrument = described.instrument.name;
    for (const auto& bridge : described.instrument.bridges)
        schedule.tensionByBridgeN.emplace_back(bridge.name, 0.0);
    for (std::size_t i = 0; i < described.instrument.courses.size(); ++i) {
        const auto& course = described.instrument.courses[i];
        schedule.courses.push_back(row(described.instrument, i, instrument));
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
