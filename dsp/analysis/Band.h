// The sound around one frequency, mixed down, filtered and thinned out.
#pragma once

#include <complex>
#include <cstddef>
#include <span>
#include <vector>

namespace hitchpin::analysis {

/// A damped partial stays an exact damped exponential in it: A·e^(qn) becomes A·H(q)·e^(q(first + m·step)).
struct Band {
    double centre = 0.0; ///< rad a sample
    std::size_t step = 1;
    std::size_t first = 0;
    std::vector<double> taps;
    std::vector<std::complex<double>> samples;

    /// H(q).
    std::complex<double> response(std::complex<double> q) const;
};

/// What lies up to a quarter of `gap` from `centre` (rad a sample) passes, what lies three quarters away is put down by
/// `stopbandDb`. The band's own rate is twice the gap. The sound must be longer than twice the filter; where it is
/// shorter the filter is cut, and puts down less.
Band bandAround(std::span<const double> sound, double centre, double gap, double stopbandDb, std::size_t mostSamples);

} // namespace hitchpin::analysis
