#include "dsp/design/InstrumentDescription.h"

namespace hitchpin::design {

const board::Board& boardOf(const InstrumentDescription& instrument, const CourseDescription& course) {
    const board::Bridge& bridge = instrument.bridges[static_cast<std::size_t>(course.bridge)];
    return instrument.boards[static_cast<std::size_t>(bridge.board)];
}

board::MobilityAt mobilityFor(const InstrumentDescription& instrument, std::size_t course, std::size_t string) {
    const auto bridgeOf = [&](const CourseDescription& of) -> const board::Bridge& {
        return instrument.bridges[static_cast<std::size_t>(of.bridge)];
    };
    const auto placeOf = [&](const CourseDescription& of) { return board::sharing(bridgeOf(of), of.bridgePosition); };
    const CourseDescription& own = instrument.courses[course];
    if (own.strings[string].description.ends.bridge == string::End::free)
        return board::MobilityAt(board::Board{}, {});
    std::vector<board::Resting> others;
    for (std::size_t c = 0; c < instrument.courses.size(); ++c) {
        const CourseDescription& other = instrument.courses[c];
        for (std::size_t s = 0; s < other.strings.size() && bridgeOf(other).board == bridgeOf(own).board; ++s)
            if ((c != course || s != string) && other.strings[s].description.ends.bridge != string::End::free)
                others.push_back({placeOf(other), other.strings[s].statics.impedance});
    }
    return board::MobilityAt(boardOf(instrument, own), placeOf(own), others);
}

} // namespace hitchpin::design
