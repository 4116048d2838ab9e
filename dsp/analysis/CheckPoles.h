// Predicted poles, many and close together, held against a sound.
#pragma once

#include <span>
#include <vector>

namespace hitchpin::analysis {

struct Pole {
    double frequency = 0.0; ///< Hz
    double decayRate = 0.0; ///< 1/s of the amplitude
};

struct CheckedPole {
    Pole measured;
    double amplitude = 0.0; ///< at the first sample, in the sound's unit
    /// Standard deviation of the decay rate and of 2π times the frequency alike, 1/s, as what the fit leaves unexplained
    /// lets them be known; large where a pole is too weak or too near to others to be told apart.
    double error = 0.0;
    /// Share of the energy of its band that all predicted poles together, unmoved, leave unexplained.
    double unexplained = 1.0;
};

/// The sound as a sum of exactly these damped sinusoids, band by band: their weights, what they leave unexplained, and how
/// far each pole has to move to explain it best (one Gauss–Newton step of all poles of the band together). Not a search:
/// what is predicted far off, or not at all, leaves much unexplained.
/// @param sound free motion only: samples after the last excitation  @param predicted rising in frequency, all that sound
/// Allocates; takes long; not for the audio thread.
std::vector<CheckedPole> checkPoles(std::span<const double> sound, double sampleRate, std::span<const Pole> predicted);

} // namespace hitchpin::analysis
