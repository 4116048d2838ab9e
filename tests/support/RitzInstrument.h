// An oracle that shares nothing with loops or junctions: strings and board as masses, springs and dampers.
#pragma once

#include "dsp/board/Soundboard.h"

#include <complex>
#include <vector>

namespace hitchpin::support {

/// A hinged string at one place of a board, swinging into the board and, where the board moves so, across.
struct RitzString {
    double length, tension, linearDensity, bendingStiffness;
    std::vector<double> decayRates; ///< of the string alone, 1/s; as many as terms are wanted
    board::Sharing place;           ///< on the board
};

/// All complex frequencies s with Im s > 0, by rising frequency.
std::vector<std::complex<double>> ritzPoles(const board::Board&, const std::vector<RitzString>&);

/// Joules on one string, into the board, a while after another let go of a newton at a ratio from its bridge; by
/// superposition of eigenvectors.
double ritzEnergyAfter(const board::Board&, const std::vector<RitzString>&, std::size_t plucked, double ratioFromBridge,
                       std::size_t heard, double seconds);

} // namespace hitchpin::support
