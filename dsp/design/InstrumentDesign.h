// A designed instrument: immutable, shared between threads, all that the engine knows.
#pragma once

#include "dsp/base/Result.h"
#include "dsp/design/InstrumentDescription.h"
#include "dsp/design/LoopDesign.h"
#include "dsp/design/MakeLoop.h"
#include "dsp/design/PlaceDesign.h"

#include <atomic>
#include <functional>
#include <memory>
#include <optional>
#include <vector>

namespace hitchpin::design {

/// A string as it speaks from one stop: open, or from a fret.
struct SpeakingString {
    LoopDesign loop;
    double speakingLength = 0.0; ///< m
    double tension = 0.0;        ///< N
    double waveSpeed = 0.0;      ///< m/s, of low partials: 2·L·f0
    PlaceDesign plucked;         ///< at the course's ratio of this speaking length
    std::optional<PlaceDesign> listening; ///< none: at the bridge
};

struct StringDesign {
    int course = 0;
    int board = 0;
    board::Sharing place;        ///< on the board
    double bridgePosition = 0.5; ///< along its bridge
    double impedance = 0.0;      ///< Z0, kg/s
    string::Ends ends;
    std::vector<SpeakingString> stops; ///< [0] open, [k] at fret k
};

struct CourseDesign {
    int key = 60;
    int firstString = 0;         ///< index into strings
    int stringCount = 1;
    double pluckRatio = 0.2;
    bool hasDamper = false;
    int frets = 0;
};

struct BoardDesign {
    board::BridgeKind kind = board::BridgeKind::rigid;
    std::vector<board::Point> points{}; ///< none where rigid
    std::vector<board::Mode> modes{}; ///< those that the sample rate can hold
    /// N per m/s: a soundboard is heard by its motion, as the force that would move its mean mobility alike.
    double heard = 0.0;
};

/// The board at a sample rate, its mean mobility worked out.
BoardDesign boardDesign(const board::Board&, double sampleRate);

struct InstrumentDesign {
    double sampleRate = 0.0;
    std::vector<BoardDesign> boards;
    std::vector<CourseDesign> courses;
    std::vector<StringDesign> strings;
    double longestT60 = 0.0;     ///< s, of the strings alone
};

/// Called between strings with the share done, 0…1. Returning false cancels.
using Progress = std::function<bool(double shareDone)>;

/// Allocates and takes long (milliseconds a string); for workers. Fails naming the course and the cause;
/// cancelled work fails with "cancelled".
Result<std::shared_ptr<const InstrumentDesign>> makeInstrument(const InstrumentDescription&, const LoopSettings&,
                                                               const Progress& = {});

} // namespace hitchpin::design
