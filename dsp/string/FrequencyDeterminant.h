// Partials of the stiff string for every pair of ends, by roots of the frequency determinant.
#pragma once

#include "dsp/string/Partials.h"

#include <vector>

namespace hitchpin::string {

/// f_n/F0 for n = 1…count of a uniform string of inharmonicity B between these ends: roots of the determinant of
/// the tensioned Euler beam, EI·y'''' − T·y'' = μω²·y, not a series.
std::vector<double> partialRatios(double inharmonicity, Ends, int count);

} // namespace hitchpin::string
