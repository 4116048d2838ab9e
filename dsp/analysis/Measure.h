// The meter: partials and decays found in a sound. Used by tests, the console and, later, on recordings.
#pragma once

#include <span>
#include <vector>

namespace hitchpin::analysis {

struct MeasuredPartial {
    double frequency = 0.0; ///< Hz
    double decayRate = 0.0; ///< 1/s of the amplitude
    double t60 = 0.0;       ///< s
    double amplitude = 0.0; ///< at the first sample, in the sound's unit
    double residual = 0.0;  ///< share of the band's energy that the fit leaves, 0…1: small is trustworthy
};

/// Damped sinusoids near each expected frequency, each fitted in its own band: mixed down, filtered, estimated by
/// ESPRIT and refined by least squares, which in white noise is the likeliest. On clean sounds of a second true within
/// 1e-4 cents and 1e-4 of the decay. Of two that one band holds (strings that beat, decay in two stages) the one with
/// more energy is named.
/// @param sound samples from the release on  @param expectedHz rising, at least some bandwidths apart. Those that are
/// not asked for but sound beside should be listed too: the width of a band is the distance to the next one listed.
/// A partial that cannot be found (over half the rate, under the noise) has frequency 0.
/// Allocates; takes long (milliseconds a partial); not for the audio thread.
std::vector<MeasuredPartial> measurePartials(std::span<const double> sound, double sampleRate,
                                             std::span<const double> expectedHz);

double centsBetween(double frequency, double reference);

} // namespace hitchpin::analysis
