// A whole instrument in SI, ready to be designed. Where the layers above hand over to the sound.
#pragma once

#include "dsp/string/Strung.h"

#include <string>
#include <vector>

namespace hitchpin::design {

struct BoardMode {
    double frequency = 0.0; ///< Hz
    double q = 0.0;
    double mass = 0.0;      ///< kg, effective at the bridge
    double angle = 0.0;     ///< rad from across towards into
    std::vector<double> shape; ///< over the bridge's points
    double pan = 0.0;       ///< −1…1
};

enum class BridgeKind { rigid, resistance, soundboard };

struct BridgeDescription {
    std::string name;
    BridgeKind kind = BridgeKind::rigid;
    int points = 1;
    double resistance = 0.0; ///< kg/s, of a resistance or of the soundboard's remainder
    std::vector<BoardMode> modes;
};

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
    std::vector<BridgeDescription> bridges;
    std::vector<CourseDescription> courses;
};

} // namespace hitchpin::design
