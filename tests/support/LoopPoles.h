// A loop judged without the code that made it: from the very numbers that the engine runs, in long double.
#pragma once

#include "dsp/engine/Rail.h"
#include "tests/support/Response.h"

#include <algorithm>
#include <cmath>
#include <complex>
#include <numbers>

namespace hitchpin::support {

/// d + c·(z − A)⁻¹·b of two states.
inline LongComplex transferOfTwoStates(LongComplex z, Long a11, Long a12, Long a21, Long a22, Long b1, Long b2, Long c1,
                                       Long c2, Long d) {
    const LongComplex determinant = (z - a11) * (z - a22) - a12 * a21;
    return d + (c1 * ((z - a22) * b1 + a12 * b2) + c2 * (a21 * b1 + (z - a11) * b2)) / determinant;
}

inline LongComplex transferOf(const design::ShelfForm& f, LongComplex z) {
    return Long(f.d) + Long(f.c) * Long(f.b) / (z - Long(f.a));
}
inline LongComplex transferOf(const design::SteepShelfForm& f, LongComplex z) {
    return transferOfTwoStates(z, f.a11, f.a12, f.a21, f.a22, f.b1, f.b2, f.c1, f.c2, f.d);
}
inline LongComplex transferOf(const design::LadderForm& f, LongComplex z) {
    const Long k1 = f.k1, q1 = f.q1, k2 = f.k2, q2 = f.q2;
    return transferOfTwoStates(z, -k1, -q1 * k2, q1, -k1 * k2, q1 * q2, k1 * q2, 0, q2, k2);
}

/// L(e^p) of a loop under a rigid bridge.
class RunningLoop {
public:
    explicit RunningLoop(const design::LoopDesign& design)
        : loop_(speaking(design), {design.turn < 0.0 ? string::End::free : string::End::hinged, string::End::hinged}),
          sampleRate_(design.sampleRate) {}

    LongComplex at(LongComplex p) const {
        const LongComplex z = std::exp(p);
        const engine::Chain& chain = loop_.chain;
        LongComplex value = Long(-chain.factor) * std::exp(-p * Long(loop_.delay)) *
                            (Long(chain.thiranSin) * z + Long(1)) / (z + Long(chain.thiranSin));
        for (const auto& shelf : chain.shelves)
            value *= transferOf(shelf, z);
        for (const auto& shelf : chain.steepShelves)
            value *= transferOf(shelf, z);
        for (const auto& section : chain.sections)
            value *= transferOf(section, z);
        return value;
    }

    struct Pole {
        double frequency, decayRate; ///< Hz, 1/s
    };
    Pole poleNear(double frequency, double decayRate) const {
        const LoopPole pole = support::poleNear([this](LongComplex p) { return at(p); }, sampleRate_, frequency, decayRate);
        const Long rate = static_cast<Long>(sampleRate_), turn = 2 * std::numbers::pi_v<Long>;
        return {static_cast<double>(pole.p.imag() * rate / turn), static_cast<double>(-pole.p.real() * rate)};
    }

    /// Largest |L| on the unit circle, over as many points evenly in frequency and evenly in its logarithm.
    double peakGain(int points) const {
        Long peak = 0;
        for (int i = 0; i <= points; ++i) {
            const Long share = static_cast<Long>(i) / static_cast<Long>(points), pi = std::numbers::pi_v<Long>;
            for (const Long omega : {pi * share, pi * std::pow(Long(10), -6 * share)})
                peak = std::max(peak, std::abs(at({0, omega})));
        }
        return static_cast<double>(peak);
    }

private:
    static design::SpeakingString speaking(const design::LoopDesign& loop) {
        design::SpeakingString string;
        string.loop = loop;
        return string;
    }
    engine::RailLoop loop_;
    double sampleRate_;
};

} // namespace hitchpin::support
