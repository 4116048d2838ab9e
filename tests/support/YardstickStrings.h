// Strings of every kind by which loops are judged: from the lowest piano string to the highest, wound, nylon,
// brass.
#pragma once

#include "dsp/string/Partials.h"

#include <cmath>
#include <vector>

namespace hitchpin::yardstick {

struct YardstickString {
    const char* name;
    double firstPartialHz;
    double inharmonicity;
    string::Losses losses;
    string::Ends ends = {};

    string::Partials partials(double cents = 0.0) const {
        const double turns = ends.oneFree() ? 0.5 : 1.0;
        const double f0 = firstPartialHz * std::exp2(cents / 1200.0) /
                          (turns * std::sqrt(1.0 + inharmonicity * turns * turns));
        return {f0, inharmonicity, ends, losses, 128};
    }
};

/// Piano: inharmonicity as measured on a grand (fits to recordings of single notes, C8 by trend). Steel,
/// nylon and brass: from their dimensions, B = π³Ed⁴/(64TL²) (Fletcher 1964). Material losses: steel and
/// brass δ = 3e-3 and 1/Q = 2e-4 (Valette and Cuesta, from memory), nylon δ = 2e-2 and 4e-4 (Woodhouse 2004).
/// PVDF: 0.74 mm at 330 mm, density and modulus as data sheets of the polymer give them (1780 kg/m³; 5.5 GPa drawn, as
/// dsp/string has it), losses between nylon and gut for want of measured ones. Bar-like: a steel rod of 2 mm
/// (μ = 7850·π/4·d²), so stiff and slack that its partials are nearly those of a hinged bar from n = 5 on (Bn² > 1).
inline std::vector<YardstickString> strings() {
    //                           f1      B        δ     1/Q    radius    kg/m
    return {{"piano A0", 27.5, 2.4e-4, {3e-3, 3e-4, 2.4e-3, 0.15}},
            {"piano C2", 65.4064, 8.95e-5, {3e-3, 3e-4, 1.3e-3, 0.045}},
            {"piano A2", 110.0, 7.5e-5, {3e-3, 3e-4, 9e-4, 0.018}},
            {"piano A4", 440.0, 6.41e-4, {3e-3, 2e-4, 5e-4, 6.17e-3}},
            {"piano C6", 1046.502, 2.42e-3, {3e-3, 2e-4, 4.5e-4, 5e-3}},
            {"piano C8", 4186.009, 1.2e-2, {3e-3, 2e-4, 3.95e-4, 3.85e-3}},
            {"steel E4 plain", 329.6276, 1.3231e-5, {3e-3, 2e-4, 1.27e-4, 3.97765e-4}},
            {"steel E2 wound", 82.4069, 9.3e-5, {3e-3, 4e-4, 5e-4, 5.546e-3}},
            {"nylon C3", 130.8128, 6e-5, {2e-2, 4e-4, 5e-4, 8.4e-4}},
            {"nylon C6", 1046.502, 5e-5, {2e-2, 4e-4, 3e-4, 3e-4}},
            {"brass C3", 130.8128, 1.9e-5, {3e-3, 2e-4, 2.5e-4, 1.669e-3}},
            {"pvdf C5", 523.2511, 8.0e-5, {2e-2, 3e-4, 3.7e-4, 7.66e-4}},
            {"bar-like, B 0.05", 200.0, 5e-2, {3e-3, 2e-4, 1e-3, 2.47e-2}},
            {"brass C3, nut free",
             130.8128,
             1.9e-5,
             {3e-3, 2e-4, 2.5e-4, 1.669e-3},
             {string::End::free, string::End::hinged}}};
}

} // namespace hitchpin::yardstick
