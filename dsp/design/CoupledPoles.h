// Every partial of a whole instrument: the poles of a board and of all loops on it together.
#pragma once

#include "dsp/design/InstrumentDesign.h"

#include <vector>

namespace hitchpin::design {

/// One way in which strings and board move together.
struct CoupledPole {
    double frequency = 0.0; ///< Hz
    double decayRate = 0.0; ///< 1/s of the amplitude
    int string = -1;        ///< whose partial it was before the board moved; −1: a mode's of the board
    int partial = 0;        ///< of that string; or the mode, from 0
    bool still = false;     ///< strings alike that move against each other and leave the board where it is
};

struct CoupledPoles {
    std::vector<CoupledPole> poles; ///< by frequency
    int notSettled = 0;             ///< roots that the search did not reach
};

/// Roots of the bridge equation of one board, as the loops run, up to `highestHz`: a string's end meets the bridge with
/// the impedance Z(1 + L)/(1 − L), the board moves with Y = Σ modes + remainder, so 1 + Y·ΣZ(1 + L)/(1 − L) has no
/// inverse. All strings open and undamped, in every direction in which the board moves. There are as many roots as
/// partials and modes: they are sought together and kept apart (Aberth 1973), each from where it would be alone.
/// Strings alike at one place are one string of their common impedance, and move against each other as each alone.
/// Allocates; seconds for a whole instrument. `progress` may cancel: then what is settled is returned.
CoupledPoles coupledPoles(const InstrumentDesign&, int board, double highestHz, const Progress& progress = {});

} // namespace hitchpin::design
