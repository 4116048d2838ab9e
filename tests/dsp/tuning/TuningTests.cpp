// Notes, pitch and temperaments. Cents of the temperaments were computed in double arithmetic from their fifths (pure
// fifth 701.9550, syntonic comma 21.5063, Pythagorean comma 23.4600 cents); pitches from ISO 16 (A4 = 440 Hz).
#include "dsp/analysis/Measure.h"
#include "dsp/tuning/Notes.h"
#include "dsp/tuning/Tuning.h"
#include "tests/support/Worse.h"

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <iostream>

using namespace hitchpin::tuning;
using hitchpin::analysis::centsBetween;

namespace {

constexpr std::array<double, 12> noOffsets{};
/// The tables print three decimals.
constexpr double printedCents = 0.0006;
Tuning equal(double a4 = 440.0) { return {a4, *findTemperament("equal"), 0, noOffsets}; }

} // namespace

TEST_CASE("Note names and numbers agree both ways", "[tuning]") {
    CHECK(noteNumber("A4") == 69);
    CHECK(noteNumber("C4") == 60);
    CHECK(noteNumber("C-1") == 0);
    CHECK(noteNumber("G9") == 127);
    CHECK(noteNumber("F#2") == 42);
    CHECK(noteNumber("Bb3") == 58);
    CHECK(noteNumber("Cb4") == 59);
    CHECK(noteNumber("B#3") == 60);
    for (const char* wrong : {"", "H4", "a4", "A", "A#", "G#9", "Cb-1", "A44", "A4 ", "A--1", "#4", "A4x", "A99999999999"})
        CHECK_FALSE(noteNumber(wrong));
    CHECK(pitchClass("C") == 0);
    CHECK(pitchClass("Cb") == 11);
    CHECK(pitchClass("B#") == 0);
    CHECK_FALSE(pitchClass("C4"));
    for (int number = 0; number < 128; ++number)
        CHECK(noteNumber(noteName(number)) == number);
}

TEST_CASE("Equal temperament gives the pitches of ISO 16", "[tuning]") {
    const std::pair<const char*, double> pitches[] = {
        {"A0", 27.5},       {"E2", 82.4069},    {"A2", 110.0},      {"D3", 146.8324},   {"G3", 195.9977},
        {"B3", 246.9417},   {"C4", 261.6256},   {"E4", 329.6276},   {"C5", 523.2511},   {"C8", 4186.0090}};
    const Tuning tuning = equal();
    for (const auto& [name, hz] : pitches) {
        CAPTURE(name);
        CHECK(tuning.frequency(*noteNumber(name)) == Approx(hz).margin(5e-5));
    }
    // Beats of tempered intervals, computed in 40-digit arithmetic: 3·A3 − 2·E4, 3·C4 − 2·G4, 5·F3 − 4·A3, 5·C4 − 4·E4.
    const auto f = [&](const char* name) { return tuning.frequency(*noteNumber(name)); };
    CHECK(3.0 * f("A3") - 2.0 * f("E4") == Approx(0.745).margin(5e-4));
    CHECK(3.0 * f("C4") - 2.0 * f("G4") == Approx(0.886).margin(5e-4));
    CHECK(4.0 * f("A3") - 5.0 * f("F3") == Approx(6.93).margin(5e-3));
    CHECK(4.0 * f("E4") - 5.0 * f("C4") == Approx(10.38).margin(5e-3));
}

// Turned red by: a fifth tempered on the wrong side, a comma taken for the other.
TEST_CASE("The temperaments have their published cents", "[tuning]") {
    // C♯ D E♭ E F F♯ G G♯ A B♭ B, from C, and the interval G♯–E♭ that closes the circle.
    const std::pair<const char*, std::array<double, 12>> rows[] = {
        {"pythagorean", {113.685, 203.910, 294.135, 407.820, 498.045, 611.730, 701.955, 815.640, 905.865, 996.090, 1109.775, 678.495}},
        {"quarter-comma meantone", {76.049, 193.157, 310.265, 386.314, 503.422, 579.471, 696.578, 772.627, 889.735, 1006.843, 1082.892, 737.637}},
        {"sixth-comma meantone", {88.594, 196.741, 304.888, 393.482, 501.629, 590.224, 698.371, 786.965, 895.112, 1003.259, 1091.853, 717.923}},
        {"werckmeister iii", {90.225, 192.180, 294.135, 390.225, 498.045, 588.270, 696.090, 792.180, 888.270, 996.090, 1092.180, 701.955}},
        {"kirnberger iii", {90.225, 193.157, 294.135, 386.314, 498.045, 590.224, 696.578, 792.180, 889.735, 996.090, 1088.269, 701.955}},
        {"vallotti", {94.135, 196.090, 298.045, 392.180, 501.955, 592.180, 698.045, 796.090, 894.135, 1000.000, 1090.225, 701.955}}};
    double worst = 0.0;
    for (const auto& [name, row] : rows) {
        const auto* temperament = findTemperament(name);
        REQUIRE(temperament != nullptr);
        CAPTURE(name);
        for (std::size_t i = 0; i < 11; ++i)
            worst = hitchpin::support::worse(worst, std::abs(temperament->cents[i + 1] - row[i]));
        CHECK(temperament->cents[0] == 0.0);
        const double fifth = 1200.0 + temperament->cents[3] - temperament->cents[8];
        worst = hitchpin::support::worse(worst, std::abs(fifth - row[11]));
    }
    std::cout << "temperaments: worst " << worst << " cent from the printed tables (allowed " << printedCents << ")\n";
    CHECK(worst <= printedCents);
    CHECK(findTemperament("no such temperament") == nullptr);
}

TEST_CASE("A4 sounds its reference whatever the root and the offsets", "[tuning]") {
    std::array<double, 12> offsets{};
    offsets[4] = 3.0;
    offsets[9] = -7.0;
    for (const auto& temperament : builtInTemperaments())
        for (int root = 0; root < 12; ++root)
            CHECK(Tuning(415.0, temperament, root, offsets).frequency(69) == Approx(415.0).epsilon(1e-14));
}

TEST_CASE("A root moves the temperament and offsets count from it", "[tuning]") {
    const auto& meantone = *findTemperament("quarter-comma meantone");
    const Tuning onD(440.0, meantone, 2, noOffsets);
    // The major third over the root is pure wherever the root lies.
    CHECK(centsBetween(onD.frequency(66), onD.frequency(62)) == Approx(386.3137).margin(1e-3));
    std::array<double, 12> offsets{};
    offsets[4] = 5.0; // the third over D
    const Tuning moved(440.0, meantone, 2, offsets);
    CHECK(centsBetween(moved.frequency(66), moved.frequency(62)) == Approx(391.3137).margin(1e-3));
    CHECK(moved.centsFromEqual(69) == Approx(0.0).margin(1e-12));
}

TEST_CASE("The harmonic intervals are those of whole ratios", "[tuning]") {
    const double harmonics[] = {1200, 1901.955, 2400, 2786.314, 3101.955, 3368.826, 3600, 3803.910};
    for (int n = 2; n <= 9; ++n)
        CHECK(centsBetween(n, 1) == Approx(harmonics[n - 2]).margin(printedCents));
}

// Octave C4–C5 with B of 2.916e-4 and 8.26e-4 (measured on a grand piano): f1 to f1 0.757 cent wide for 2:1 and 1.636
// for 4:2, computed in 40-digit arithmetic from f_n = n·F0·√(1+Bn²).
// Turned red by: F0 taken for f1, or the two strings' B exchanged.
TEST_CASE("Stretched octaves match the partials of both strings", "[tuning]") {
    const auto b = [](int note) { return 2.916e-4 * std::exp2((note - 60) / 12.0 * std::log2(8.26e-4 / 2.916e-4)); };
    const Tuning two = equal().stretched(Stretch::octaves2to1, b), four = equal().stretched(Stretch::octaves4to2, b);
    CHECK(centsBetween(two.frequency(72), two.frequency(60)) - 1200.0 == Approx(0.757).margin(5e-4));
    CHECK(centsBetween(four.frequency(72), four.frequency(60)) - 1200.0 == Approx(1.636).margin(5e-4));
    double worst = 0.0;
    for (int note = 0; note < 116; ++note) {
        const auto partial = [&](int which, int n) {
            const double law = std::sqrt((1.0 + b(which) * n * n) / (1.0 + b(which)));
            return four.frequency(which) * n * law;
        };
        if (note < 57 || note >= 69 || note == 57) // within the temperament octave only its own ends are matched
            worst = hitchpin::support::worse(worst, std::abs(centsBetween(partial(note + 12, 2), partial(note, 4))));
    }
    std::cout << "4:2 octaves: partials apart by at most " << worst << " cent (allowed 1e-9)\n";
    CHECK(worst < 1e-9);
    CHECK(four.frequency(69) == Approx(440.0).epsilon(1e-14));
    CHECK(equal().stretched(Stretch::none, b).frequency(100) == equal().frequency(100));
}

// Railsback's curve: flat in the bass by up to 30 cents, sharp in the treble by 20 to 40 at the top (from memory:
// order of size alone). B as measured on a grand piano, up to the highest note where it could be.
TEST_CASE("The stretch of a piano has the usual sign and size", "[tuning]") {
    const std::pair<int, double> measured[] = {{21, 2.4e-4},   {33, 8.9e-5},  {45, 7.5e-5}, {60, 2.916e-4},
                                               {72, 8.26e-4}, {84, 2.42e-3}, {93, 5.4e-3}};
    const auto b = [&](int note) {
        for (std::size_t i = 1; i < std::size(measured); ++i)
            if (note <= measured[i].first) {
                const double t = double(note - measured[i - 1].first) / (measured[i].first - measured[i - 1].first);
                return measured[i - 1].second * std::pow(measured[i].second / measured[i - 1].second, t);
            }
        return measured[6].second;
    };
    const Tuning piano = equal().stretched(Stretch::octaves4to2, b);
    std::cout << "stretch by a grand piano's B, 4:2: " << piano.centsFromEqual(21) << " cents at A0, "
              << piano.centsFromEqual(93) << " at A6\n";
    CHECK(piano.centsFromEqual(21) < 0.0);
    CHECK(piano.centsFromEqual(21) > -30.0);
    CHECK(piano.centsFromEqual(93) > 0.0);
    CHECK(piano.centsFromEqual(93) < 40.0);
}
