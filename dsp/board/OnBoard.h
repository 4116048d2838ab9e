// One string at a bridge that moves: what the board does to its pitch and its decay.
#pragma once

#include "dsp/base/Result.h"
#include "dsp/board/Soundboard.h"
#include "dsp/string/Strung.h"

namespace hitchpin::board {

/// A string swings in two ways; where a mode lies at an angle neither is purely into the board or across it.
enum class Motion { mostlyInto, mostlyAcross };

/// Partial n of a string on the board, in one motion.
struct PartialOnBoard {
    double frequency = 0.0; ///< Hz
    double decayRate = 0.0; ///< 1/s of the amplitude
    double t60 = 0.0;       ///< s
    double shift = 0.0;     ///< cents against the string alone
    double share = 1.0;     ///< how much of this motion is the string's: it follows the string's own pitch by so much
};

/// The sounding pole s next to the string's own s_n = −σ_n + j2πf_n. A string of round trip τ = dn/df and impedance Z
/// meets its bridge with Z·coth((s − s_n)τ/2), exact for a string whose τ is steady about s_n, so that
///     s = s_n − (2/τ)·atanh(Z·Y(s)).
/// Y is the mobility's eigenvalue in the direction of the motion. Where a mode lies near, there are
/// several roots: the one in which the string takes most part, Re ds/ds_n, is meant.
PartialOnBoard partialOnBoard(const string::Partials&, double impedance, const MobilityAt&, int n,
                              Motion = Motion::mostlyInto);

/// Where a resonance pulls by more than this (cents) no tension brings the string to its pitch in a way that would be
/// called in tune: a wolf.
inline constexpr double wolfCents = 15.0;
/// And where the string takes less part than this in its own partial, it is no longer the string that is tuned.
inline constexpr double leastShare = 0.5;

bool isWolf(const PartialOnBoard& first) noexcept;

/// The same string at the tension at which its first partial sounds at `hz` on the board; at a wolf, alone. Fails where
/// the figures cannot make a string.
Result<string::Strung> tunedOnBoard(const string::Strung& alone, double hz, const MobilityAt&, int partialCount);

} // namespace hitchpin::board
