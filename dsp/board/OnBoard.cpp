#include "dsp/board/OnBoard.h"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace hitchpin::board {

namespace {

using Complex = std::complex<double>;
constexpr double pi = std::numbers::pi;

double cents(double hz, double reference) { return 1200.0 * std::log2(hz / reference); }

/// The mobility in the direction of the motion.
Complex along(Motion motion, const Mobility& y) {
    if (y.coupled == 0.0)
        return motion == Motion::mostlyInto ? y.into : y.across;
    const Complex mean = 0.5 * (y.across + y.into), half = 0.5 * (y.into - y.across);
    const Complex root = std::sqrt(half * half + y.coupled * y.coupled);
    const bool plusIsInto = std::abs(root - half) <= std::abs(root + half);
    return plusIsInto == (motion == Motion::mostlyInto) ? mean + root : mean - root;
}

/// How far the board moves the pole of a string with that round trip and impedance: (2/τ)·atanh(Z·Y(s)).
class Pull {
public:
    Pull(const MobilityAt& mobility, double impedance, double roundTrip, Motion motion)
        : mobility_(mobility), impedance_(impedance), roundTrip_(roundTrip), motion_(motion) {}

    Complex operator()(Complex s) const {
        return 2.0 / roundTrip_ * std::atanh(impedance_ * along(motion_, mobility_(s)));
    }
    /// By s: central difference over a thousandth of a hertz, far less than any resonance is wide.
    Complex slope(Complex s) const {
        constexpr double step = 2e-3 * pi;
        return ((*this)(s + step) - (*this)(s - step)) / (2.0 * step);
    }
    /// ds/ds_n of the sounding pole s = s_n − pull(s).
    Complex follows(Complex s) const { return 1.0 / (1.0 + slope(s)); }

private:
    const MobilityAt& mobility_;
    double impedance_, roundTrip_;
    Motion motion_;
};

Complex ownPole(const string::Partials& partials, int n) {
    return {-partials.decayRate(n), 2.0 * pi * partials.frequency(n)};
}

/// Newton on s + pull(s) = own; false where it does not settle near the partial.
bool settle(const Pull& pull, Complex own, double spacing, Complex& s) {
    for (int round = 0; round < 60; ++round) {
        const Complex step = (own - s - pull(s)) * pull.follows(s);
        const double length = std::abs(step), longest = 0.1 * spacing;
        if (!std::isfinite(length))
            return false;
        s += length > longest ? step * (longest / length) : step;
        if (std::abs(s - own) > spacing)
            return false;
        if (length < 1e-12 * std::abs(s))
            return true;
    }
    return false;
}

} // namespace

PartialOnBoard partialOnBoard(const string::Partials& partials, double impedance, const MobilityAt& mobility, int n,
                              Motion motion) {
    const Complex own = ownPole(partials, n);
    const double spacing = 2.0 * pi * partials.slope(n);
    const Pull pull(mobility, impedance, 1.0 / partials.slope(n), motion);
    Complex best = own;
    double share = -1.0;
    const auto tryFrom = [&](Complex s) {
        if (!settle(pull, own, spacing, s))
            return;
        const double part = pull.follows(s).real();
        if (part > share) {
            share = part;
            best = s;
        }
    };
    tryFrom(own);
    // A second root lies where a resonance repels the first.
    if (share < 0.9)
        for (const double way : {-0.05, -0.01, 0.01, 0.05})
            tryFrom(own + Complex(0.0, way * spacing));
    PartialOnBoard found;
    found.frequency = best.imag() / (2.0 * pi);
    found.decayRate = -best.real();
    found.t60 = std::log(1000.0) / found.decayRate;
    found.shift = cents(found.frequency, partials.frequency(n));
    found.share = share < 0.0 ? 0.0 : share;
    return found;
}

bool isWolf(const PartialOnBoard& first) noexcept {
    return std::abs(first.shift) > wolfCents || first.share < leastShare;
}

Result<string::Strung> tunedOnBoard(const string::Strung& alone, double hz, const MobilityAt& mobility,
                                    int partialCount) {
    constexpr int mostRounds = 12;
    constexpr double exact = 1e-8, reachedCents = 1e-3; // wound strings with bare ends meet a pitch to 1e-5
    string::Strung now = alone;
    double ownHz = hz;
    // What pitch of its own a string needs that is to sound at `hz` follows without a search, but for what its
    // tension does to its impedance and decay.
    for (int round = 0; round < mostRounds; ++round) {
        const double roundTrip = 1.0 / now.partials.slope(1.0);
        const Pull pull(mobility, now.statics.impedance, roundTrip, Motion::mostlyInto);
        Complex s(-now.partials.decayRate(1.0), 2.0 * pi * hz);
        // The decay at that pitch, by Newton: next to a resonance Y depends on it.
        for (int inner = 0; inner < 30; ++inner) {
            const double step = (s.real() + now.partials.decayRate(1.0) + pull(s).real()) / (1.0 + pull.slope(s).real());
            s.real(s.real() - step);
            if (!(std::abs(step) > 1e-13 * s.imag()))
                break;
        }
        const double wanted = hz + pull(s).imag() / (2.0 * pi);
        if (!(std::abs(cents(hz, wanted)) <= 2.0 * wolfCents))
            break;
        if (round > 0 && std::abs(cents(wanted, ownHz)) < exact)
            break;
        ownHz = wanted;
        auto next = string::strungToPitch(alone.description, ownHz, partialCount);
        if (!next)
            return next.error();
        now = std::move(next).value();
    }
    // Next to a strong resonance no tension brings it there: the string's pole jumps over that pitch.
    const PartialOnBoard reached = partialOnBoard(now.partials, now.statics.impedance, mobility, 1);
    if (std::abs(cents(reached.frequency, hz)) < reachedCents && !isWolf(reached))
        return now;
    return string::strungToPitch(alone.description, hz, partialCount);
}

} // namespace hitchpin::board
