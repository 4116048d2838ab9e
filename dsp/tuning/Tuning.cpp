#include "dsp/tuning/Tuning.h"

#include <cmath>
#include <utility>

namespace hitchpin::tuning {
namespace {

constexpr int referenceNote = 69; // A4
constexpr int lowA = 57;          // A3, the lower end of the temperament octave
const double pureFifth = 1200.0 * std::log2(1.5);
const double syntonicComma = 1200.0 * std::log2(81.0 / 80.0);
const double pythagoreanComma = 12.0 * pureFifth - 7.0 * 1200.0;

/// A circle of fifths from E♭ up to G♯, C = 0: how far each of the eleven fifths is narrower than pure, in cents.
/// The twelfth, G♯–E♭, gets what is left.
Temperament fromFifths(std::string name, const std::array<double, 11>& narrowed) {
    static constexpr int eFlat = 3;
    std::array<double, 12> cents{};
    double sum = 0.0;
    int note = eFlat;
    for (std::size_t i = 0; i <= narrowed.size(); ++i) {
        cents[static_cast<std::size_t>(note)] = sum;
        if (i < narrowed.size())
            sum += pureFifth - narrowed[i];
        note = (note + 7) % 12;
    }
    const double c = cents[0];
    for (double& value : cents) {
        value = std::fmod(value - c, 1200.0);
        if (value < -1e-9)
            value += 1200.0;
    }
    cents[0] = 0.0;
    return {std::move(name), cents};
}

std::array<double, 11> evenly(double narrowed) {
    std::array<double, 11> all{};
    all.fill(narrowed);
    return all;
}

/// Fifths in the order E♭–B♭–F–C–G–D–A–E–B–F♯–C♯–G♯.
std::vector<Temperament> makeTemperaments() {
    const double p4 = pythagoreanComma / 4.0, p6 = pythagoreanComma / 6.0, s4 = syntonicComma / 4.0;
    const double schisma = pythagoreanComma - syntonicComma;
    std::vector<Temperament> all;
    Temperament equal{"equal", {}};
    for (std::size_t i = 0; i < 12; ++i)
        equal.cents[i] = 100.0 * static_cast<double>(i);
    all.push_back(equal);
    all.push_back(fromFifths("pythagorean", evenly(0.0)));
    all.push_back(fromFifths("quarter-comma meantone", evenly(s4)));
    all.push_back(fromFifths("sixth-comma meantone", evenly(syntonicComma / 6.0)));
    // Werckmeister 1691: C–G, G–D, D–A and B–F♯ narrowed by a quarter of the Pythagorean comma.
    all.push_back(fromFifths("werckmeister iii", {0, 0, 0, p4, p4, p4, 0, 0, p4, 0, 0}));
    // Kirnberger 1779: C–G–D–A–E narrowed by a quarter of the syntonic comma, F♯–C♯ by the schisma.
    all.push_back(fromFifths("kirnberger iii", {0, 0, 0, s4, s4, s4, s4, 0, 0, schisma, 0}));
    // Vallotti: F–C–G–D–A–E–B narrowed by a sixth of the Pythagorean comma.
    all.push_back(fromFifths("vallotti", {0, 0, p6, p6, p6, p6, p6, p6, 0, 0, 0}));
    return all;
}

/// By how much the octave above a note is wider than 2:1 when its partials coincide, in cents, from
/// f_n = n·F0·√(1+B·n²) (Fletcher 1964). Both ratios are from first partial to first partial.
double octaveStretch(Stretch stretch, double lowB, double highB) {
    const auto law = [](double b, int n) { return std::sqrt(1.0 + b * n * n); };
    const double ratio = stretch == Stretch::octaves2to1
                             ? law(lowB, 2) / law(lowB, 1)
                             : law(lowB, 4) / law(lowB, 1) * law(highB, 1) / law(highB, 2);
    return 1200.0 * std::log2(ratio);
}

} // namespace

const std::vector<Temperament>& builtInTemperaments() {
    static const std::vector<Temperament> all = makeTemperaments();
    return all;
}

const Temperament* findTemperament(std::string_view name) {
    for (const auto& temperament : builtInTemperaments())
        if (temperament.name == name)
            return &temperament;
    return nullptr;
}

Tuning::Tuning(double a4Hz, const Temperament& temperament, int rootPitchClass,
               const std::array<double, 12>& offsetsCents)
    : a4Hz_(a4Hz), cents_{} {
    const auto aboveRoot = [&](int note) {
        const int degree = ((note - rootPitchClass) % 12 + 12) % 12;
        const int octave = (note - rootPitchClass - degree) / 12;
        return 1200.0 * octave + temperament.cents[static_cast<std::size_t>(degree)] +
               offsetsCents[static_cast<std::size_t>(degree)];
    };
    for (int note = 0; note < 128; ++note)
        cents_[static_cast<std::size_t>(note)] = aboveRoot(note) - aboveRoot(referenceNote);
}

double Tuning::frequency(int note) const {
    return a4Hz_ * std::exp2(cents_[static_cast<std::size_t>(note)] / 1200.0);
}

double Tuning::centsFromEqual(int note) const {
    return cents_[static_cast<std::size_t>(note)] - 100.0 * (note - referenceNote);
}

Tuning Tuning::stretched(Stretch stretch, const InharmonicityOfNote& inharmonicity) const {
    Tuning result = *this;
    if (stretch == Stretch::none)
        return result;
    const auto widened = [&](int low) { return octaveStretch(stretch, inharmonicity(low), inharmonicity(low + 12)); };
    std::array<double, 128> added{};
    const auto at = [&](int note) -> double& { return added[static_cast<std::size_t>(note)]; };
    for (int note = lowA; note <= referenceNote; ++note)
        at(note) = widened(lowA) * (note - referenceNote) / 12.0;
    for (int note = referenceNote + 1; note < 128; ++note)
        at(note) = at(note - 12) + widened(note - 12);
    for (int note = lowA - 1; note >= 0; --note)
        at(note) = at(note + 12) - widened(note);
    for (std::size_t i = 0; i < added.size(); ++i)
        result.cents_[i] += added[i];
    return result;
}

} // namespace hitchpin::tuning
