// From notes to frequencies: reference pitch, temperament, stretch.
#pragma once

#include "dsp/base/Result.h"

#include <array>
#include <functional>
#include <string>
#include <string_view>
#include <vector>

namespace hitchpin::tuning {

/// Cents above the root of the twelve notes of an octave, [0] = 0.
struct Temperament {
    std::string name;
    std::array<double, 12> cents;
};

/// "equal", "pythagorean", "quarter-comma meantone", "sixth-comma meantone", "werckmeister iii",
/// "kirnberger iii", "vallotti".
const std::vector<Temperament>& builtInTemperaments();
const Temperament* findTemperament(std::string_view name);

enum class Stretch { none, octaves2to1, octaves4to2 };

/// B of the string that sounds a note. Notes without a string get what the caller interpolates.
using InharmonicityOfNote = std::function<double(int note)>;

class Tuning {
public:
    /// A4 sounds exactly `a4Hz` whatever the root and the offsets. `offsetsCents` count from the root.
    Tuning(double a4Hz, const Temperament&, int rootPitchClass, const std::array<double, 12>& offsetsCents);

    double frequency(int note) const; ///< Hz of the first partial, 0 ≤ note ≤ 127
    /// Cents against equal temperament at the same a4Hz, stretch included.
    double centsFromEqual(int note) const;
    /// The same tuning with octaves stretched so that partials 2:1 (or 4:2) coincide exactly, octave upon octave
    /// from A3–A4, within which the stretch is spread evenly.
    Tuning stretched(Stretch, const InharmonicityOfNote&) const;

private:
    double a4Hz_;
    std::array<double, 128> cents_; ///< above A4
};

} // namespace hitchpin::tuning
