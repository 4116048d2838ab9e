// For tests that look for their worst case.
#pragma once

#include <cmath>

namespace hitchpin::support {

/// The larger of two errors. One that is no number stays, and fails whatever it is held against: std::max would let it
/// pass.
inline double worse(double a, double b) { return a > b || std::isnan(a) ? a : b; }

} // namespace hitchpin::support
