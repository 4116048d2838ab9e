// A whole instrument in SI, ready to be designed. Where the layers above hand over to the sound.
#pragma once

#include "dsp/board/Soundboard.h"
#include "dsp/string/Strung.h"

#include <string>
#include <vector>

namespace hitchpin::design {

/// Strings that sound one note together.
struct CourseDescription {
    std::string name;          ///< "A2"
    int key = 60;              ///< nearest note number of the open course
    double openHz = 0.0;       ///< pitch it is tuned to
    std::vector<string::Strung> strings;
    int bridge = 0;            ///< index into bridges
    double bridgePosition = 0.5; ///< 0…1 along the bridge
    double pluckRatio = 0.2;   ///< of the speaking length, from the bridge
    double listeningRatio = 0.0; ///< the same; 0: the force at the bridge is heard, else Z0 times the velocity there
    bool hasDamper = false;
    int frets = 0;             ///< stops at L·2^(−k/12), k = 1…frets
};

struct InstrumentDescription {
    std::string name;
    std::vector<board::Board> boards;
    std::vector<board::Bridge> bridges;
    std::vector<CourseDescription> courses;
};

/// The board that a course's bridge stands on.
const board::Board& boardOf(const InstrumentDescription&, const CourseDescription&);

/// The board as one string meets it: all the other strings there at rest. None moves where it is rigid or the string's
/// end at it free.
board::MobilityAt mobilityFor(const InstrumentDescription&, std::size_t course, std::size_t string);

} // namespace hitchpin::design
