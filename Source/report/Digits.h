// Figures as people read them: no more digits than are meant.
#pragma once

#include <string>

namespace hitchpin::report {

/// Three significant digits, never in powers of ten: 0.0123, 72.6, 649, 1460.
std::string threeDigits(double);
/// A measure in mm as on a gauge: two decimals, a third where it counts: "0.60", "0.254".
std::string measure(double mm);
std::string fixed(double, int decimals);
/// Powers of ten with two digits: "3.9e-4".
std::string small(double);

} // namespace hitchpin::report
