// Designed filters evaluated from their finished coefficients, in long double and without the code that made them.
#pragma once

#include "dsp/design/LoopDesign.h"
#include "dsp/design/PlaceDesign.h"

#include <cmath>
#include <complex>
#include <numbers>

namespace hitchpin::support {

using Long = long double;
using LongComplex = std::complex<Long>;

inline LongComplex responseOf(double gain, int delay, double thiran, const std::vector<design::LossShelf>& shelves,
                              const std::vector<design::AllpassSection>& sections, LongComplex z) {
    const LongComplex back = Long(1) / z;
    const auto n = [](double x) { return static_cast<Long>(x); };
    LongComplex value = n(gain) * std::pow(back, delay) * (n(thiran) + back) / (Long(1) + n(thiran) * back);
    const LongComplex s = (Long(1) - back) / (Long(1) + back);
    for (const auto& shelf : shelves) {
        const bool high = shelf.loses == design::LossShelf::Loses::high;
        const Long w = n(shelf.corner), gamma = std::exp(-n(shelf.depth)), root = std::sqrt(Long(2));
        if (shelf.order == 1)
            value *= (high ? w + gamma * s : gamma * w + s) / (w + s);
        else if (high)
            value *= (gamma * gamma * s * s + root * gamma * w * s + w * w) / (s * s + root * w * s + w * w);
        else
            value *= (s * s + root * gamma * w * s + gamma * gamma * w * w) / (s * s + root * w * s + w * w);
    }
    for (const auto& section : sections) {
        const Long c0 = n(section.c0), c1 = n(section.c1), scale = 1 + c1 + c0;
        const Long a1 = 2 * (c0 - 1) / scale, a2 = (1 - c1 + c0) / scale;
        value *= (a2 + a1 * back + back * back) / (Long(1) + a1 * back + a2 * back * back);
    }
    return value;
}

inline LongComplex responseOf(const design::LoopDesign& loop, LongComplex z) {
    return static_cast<Long>(loop.turn) *
           responseOf(loop.gain, loop.delay, loop.thiran, loop.shelves, loop.sections, z);
}

/// S of a place.
inline LongComplex sideOf(const design::PlaceDesign& place, LongComplex z) {
    return responseOf(place.gain, place.delay, place.thiran, place.shelves, place.sections, z);
}
/// Its level; Thiran's factor is one.
inline LongComplex levelOf(const design::PlaceDesign& place, LongComplex z) {
    return responseOf(place.levelGain, 0, 1.0, place.level, {}, z);
}

/// A pole of the loop, e^p, and the loop's delay there, −d ln L/dp, in samples.
struct LoopPole {
    LongComplex p;
    LongComplex delay;
};

/// Newton on ln L(e^p) = 0, the derivative by differences. Taking the nearest branch of the logarithm, it finds a
/// pole that is within half a partial of where it starts, and no other.
/// `loopAt(p)` is L(e^p).
template <class LoopAt>
LoopPole poleNear(const LoopAt& loopAt, double sampleRate, double frequency, double decayRate) {
    const Long rate = static_cast<Long>(sampleRate);
    LoopPole pole{{-decayRate / rate, 2 * std::numbers::pi_v<Long> * frequency / rate}, 1};
    for (int i = 0; i < 30; ++i) {
        const Long h = 1e-7L;
        pole.delay = -std::log(loopAt(pole.p + h) / loopAt(pole.p - h)) / (2 * h);
        const LongComplex step = -std::log(loopAt(pole.p)) / pole.delay;
        pole.p -= step;
        if (std::abs(step) < 1e-15L)
            break;
    }
    return pole;
}
inline LoopPole poleNear(const design::LoopDesign& loop, double frequency, double decayRate) {
    return poleNear([&](LongComplex p) { return responseOf(loop, std::exp(p)); }, loop.sampleRate, frequency, decayRate);
}

} // namespace hitchpin::support
