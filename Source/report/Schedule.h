// The stringing schedule: figures for every course, totals and warnings. One source for table, CSV, JSON and window.
#pragma once

#include "Source/document/Document.h"

#include <string>
#include <vector>

namespace hitchpin::report {

/// Partials that a row lists.
inline constexpr int partialsListed = 16;
/// Partials that document::describe should solve so that those are good to a tenth of a cent.
inline constexpr int partialsForSchedule = 24;

struct ScheduleRow {
    std::string note;
    double pitchHz = 0.0;  ///< as it sounds on the board; partialsHz[0] is the string alone
    int strings = 1;
    double speakingLengthMm = 0.0;
    std::string core;      ///< "music wire 0.60 mm"
    std::string windings;  ///< "copper 0.35 mm round", or empty
    double outerDiameterMm = 0.0;
    double linearDensityKgM = 0.0;
    double tensionN = 0.0; ///< a string
    double courseTensionN = 0.0;
    double stressMpa = 0.0;
    double breakingLoadN = 0.0;
    double breakingShare = 0.0;
    double workingShare = 0.0;
    double semitonesToBreaking = 0.0;
    double stretchMm = 0.0;
    double inharmonicity = 0.0;
    double impedanceKgS = 0.0;
    double longitudinalHz = 0.0;
    std::vector<double> partialsHz;
    std::vector<double> decayT60S; ///< the string alone
    std::vector<double> boardT60S; ///< on its board, the others there at rest
    double boardShiftCents = 0.0;  ///< by which the bridge moves the first partial
    std::vector<std::string> warnings;
};

struct Schedule {
    std::string instrument;
    std::vector<ScheduleRow> courses;
    double totalTensionN = 0.0;
    std::vector<std::pair<std::string, double>> tensionByBridgeN;
    std::vector<std::string> warnings; ///< of the whole: jumps at a break, cautions
};

Schedule makeSchedule(const document::Instrument&, const document::Described&);

std::string toTable(const Schedule&); ///< honest digits, for a terminal
std::string toCsv(const Schedule&);   ///< full precision, units in the header
std::string toJson(const Schedule&);  ///< full precision

} // namespace hitchpin::report
