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

/// Damped sinusoids near each expected frequency, each fitted in its own band.
/// @param sound samples from the release on  @param expectedHz rising, at least some bandwidths apart
/// A partial that cannot be found (over half the rate, under the noise) has frequency 0.
/// Allocates; takes long; not for the audio thread.
std::vector<MeasuredPartial> measurePartials(std::span<const double> sound, double sampleRate,
                                             std::span<const double> expectedHz);

double centsBetween(double frequency, double reference);

} // namespace hitchpin::analysis
