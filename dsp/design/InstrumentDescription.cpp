#include "dsp/design/InstrumentDescription.h"

namespace hitchpin::design {

board::MobilityAt mobilityFor(const InstrumentDescription& instrument, std::size_t course, std::size_t string) {
    const CourseDescription& own = instrument.courses[course];
    if (own.strings[string].description.ends.bridge == string::End::free)
        return board::MobilityAt(board::Bridge{}, own.bridgePosition);
    std::vector<board::Resting> others;
    for (std::size_t c = 0; c < instrument.courses.size(); ++c) {
        const CourseDescription& other = instrument.courses[c];
        for (std::size_t s = 0; s < other.strings.size() && other.bridge == own.bridge; ++s)
            if ((c != course || s != string) && other.strings[s].description.ends.bridge != string::End::free)
                others.push_back({other.bridgePosition, other.strings[s].statics.impedance});
    }
    return board::MobilityAt(instrument.bridges[static_cast<std::size_t>(own.bridge)], own.bridgePosition, others);
}

} // namespace hitchpin::design
