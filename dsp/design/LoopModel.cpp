#include "dsp/design/LoopModel.h"

#include "dsp/design/Sections.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>

namespace hitchpin::design {

namespace {

using Complex = std::complex<double>;
constexpr double pi = std::numbers::pi;

/// Products written out: the library's own check for infinities at every turn, which costs half the design
/// time.
Complex times(Complex a, Complex b) {
    return {a.real() * b.real() - a.imag() * b.imag(), a.real() * b.imag() + a.imag() * b.real()};
}
Complex inverse(Complex a) {
    const double scale = 1.0 / (a.real() * a.real() + a.imag() * a.imag());
    return {a.real() * scale, -a.imag() * scale};
}
/// ln of a quotient whose parts both lie in the right half plane.
Complex logQuotient(Complex upper, Complex lower) {
    const Complex product = times(upper, std::conj(lower));
    return {0.5 * std::log(std::norm(upper) / std::norm(lower)), std::atan2(product.imag(), product.real())};
}

/// Whether a's angle in (−π, π] is the higher one.
bool higherAngle(Complex a, Complex b) {
    if ((a.imag() >= 0.0) != (b.imag() >= 0.0))
        return a.imag() >= 0.0;
    return b.real() * a.imag() - b.imag() * a.real() > 0.0;
}

/// D(w, s) of a shelf's order and s·dD/ds.
struct ShelfPart {
    Complex value;
    Complex growth;
};
ShelfPart shelfPart(int order, double w, Complex s) {
    if (order == 1)
        return {w + s, s};
    const Complex first = (std::numbers::sqrt2 * w) * s, second = times(s, s);
    return {w * w + first + second, first + 2.0 * second};
}
ShelfPart upperPart(const LossShelf& shelf, Complex s) {
    const double gamma = std::exp(-shelf.depth);
    return shelf.loses == LossShelf::Loses::high ? shelfPart(shelf.order, shelf.corner, gamma * s)
                                                 : shelfPart(shelf.order, gamma * shelf.corner, s);
}
ShelfPart lowerPart(const LossShelf& shelf, Complex s) {
    return shelfPart(shelf.order, shelf.corner, s);
}

} // namespace

std::size_t constantCount(const LoopModel& model) {
    return firstLossConstant(model) + 1 + 2 * model.shelves.size();
}

std::size_t firstLossConstant(const LoopModel& model) {
    return 1 + 2 * model.sections.size();
}

std::vector<double> constantsOf(const LoopModel& model) {
    std::vector<double> constants{model.thiranDelay > 0.0 ? model.thiranDelay : model.straightDelay};
    for (const AllpassSection& section : model.sections) {
        constants.push_back(std::log(section.c0));
        constants.push_back(std::log(section.c1));
    }
    constants.push_back(std::log(model.loss));
    for (const LossShelf& shelf : model.shelves) {
        constants.push_back(std::log(shelf.corner));
        constants.push_back(std::log(shelf.depth));
    }
    return constants;
}

bool setConstants(LoopModel& model, std::span<const double> constants, std::size_t first) {
    constexpr double bound = 45.0; // of logarithms: far past any use, short of overflow
    const std::size_t lossAt = firstLossConstant(model);
    for (std::size_t i = 0; i < constants.size(); ++i) {
        const std::size_t which = first + i;
        const double value = constants[i];
        if (which > 0 && !(std::abs(value) < bound))
            return false;
        if (which == 0) {
            if (!(value > 0.0))
                return false;
            (model.thiranDelay > 0.0 ? model.thiranDelay : model.straightDelay) = value;
        } else if (which < lossAt) {
            AllpassSection& section = model.sections[(which - 1) / 2];
            ((which - 1) % 2 == 0 ? section.c0 : section.c1) = std::exp(value);
        } else if (which == lossAt) {
            model.loss = std::max(model.leastLoss, std::exp(value));
        } else {
            LossShelf& shelf = model.shelves[(which - lossAt - 1) / 2];
            ((which - lossAt - 1) % 2 == 0 ? shelf.corner : shelf.depth) = std::exp(value);
        }
    }
    return true;
}

Complex logLine(const LoopModel& model, Complex p, Complex s, std::span<Complex> byConstant) {
    const bool derivatives = !byConstant.empty();
    Complex sum = -model.straightDelay * p;
    if (derivatives)
        byConstant[0] = -p;
    if (model.thiranDelay > 0.0) {
        // Thiran's (a + z⁻¹)/(1 + a·z⁻¹) with a = (1−d)/(1+d) is (1 − d·s)/(1 + d·s).
        const Complex upper = 1.0 - model.thiranDelay * s, lower = 1.0 + model.thiranDelay * s;
        // Near half the rate `upper` leaves the right half plane: its own angle, not that of the quotient.
        sum += Complex(0.5 * std::log(std::norm(upper) / std::norm(lower)),
                       std::atan2(upper.imag(), upper.real()) - std::atan2(lower.imag(), lower.real()));
        if (derivatives)
            byConstant[0] = -times(s, inverse(upper) + inverse(lower));
    }

    const Complex s2 = times(s, s);
    // Every section turns by an angle between 0 (at rest) and −2π (at half the rate). Instead of adding arcs,
    // the quotients are multiplied, and a full turn is counted whenever the product's angle rises.
    Complex product = 1.0;
    int fullTurns = 0;
    for (std::size_t k = 0; k < model.sections.size(); ++k) {
        const AllpassSection& section = model.sections[k];
        const Complex upper = s2 - section.c1 * s + section.c0, lower = s2 + section.c1 * s + section.c0;
        // One division serves the quotient N/D = N²/(ND) and the derivatives.
        const Complex overBoth = inverse(times(upper, lower));
        const Complex next = times(product, times(times(upper, upper), overBoth));
        fullTurns += higherAngle(next, product) ? 1 : 0;
        product = next;
        if (derivatives) {
            // d ln A/d ln c0 = c0·(1/N − 1/D) = 2c0c1·s/(ND);  d ln A/d ln c1 = −c1·s·(1/N + 1/D)
            const Complex common = (2.0 * section.c1) * times(s, overBoth);
            byConstant[1 + 2 * k] = section.c0 * common;
            byConstant[2 + 2 * k] = -times(common, s2 + section.c0);
        }
    }
    sum += Complex(0.5 * std::log(std::norm(product)),
                   std::atan2(product.imag(), product.real()) - 2.0 * pi * fullTurns);
    return sum;
}

Complex logLoss(const LoopModel& model, Complex s, std::span<Complex> byConstant) {
    const bool derivatives = !byConstant.empty();
    Complex sum = -model.loss;
    if (derivatives)
        byConstant[0] = -model.loss;
    for (std::size_t i = 0; i < model.shelves.size(); ++i) {
        const LossShelf& shelf = model.shelves[i];
        const auto [upper, upperGrowth] = upperPart(shelf, s);
        const auto [lower, lowerGrowth] = lowerPart(shelf, s);
        sum += logQuotient(upper, lower);
        if (derivatives) {
            // D is homogeneous in w and s of degree m: w·dD/dw = m·D − s·dD/ds.
            const Complex up = times(upperGrowth, inverse(upper)), down = times(lowerGrowth, inverse(lower));
            byConstant[1 + 2 * i] = down - up;
            byConstant[2 + 2 * i] =
                -shelf.depth * (shelf.loses == LossShelf::Loses::high ? up : Complex(shelf.order) - up);
        }
    }
    return sum;
}

Complex logLoopSlope(const LoopModel& model, Complex s) {
    const Complex s2 = times(s, s);
    Complex byS = 0.0;
    if (model.thiranDelay > 0.0) {
        const double d = model.thiranDelay;
        byS -= d * (inverse(1.0 - d * s) + inverse(1.0 + d * s));
    }
    for (const auto& [c0, c1] : model.sections)
        byS += (2.0 * c1) * times(s2 - c0, inverse(times(s2 - c1 * s + c0, s2 + c1 * s + c0)));
    for (const LossShelf& shelf : model.shelves) {
        const auto [upper, upperGrowth] = upperPart(shelf, s);
        const auto [lower, lowerGrowth] = lowerPart(shelf, s);
        byS += times(times(upperGrowth, inverse(upper)) - times(lowerGrowth, inverse(lower)), inverse(s));
    }
    return -model.straightDelay + times(byS, 0.5 * (1.0 - s2)); // ds/dp = (1−s²)/2
}

Complex loopPole(const LoopModel& model, double turns, Complex start) {
    Complex p = start;
    for (int iteration = 0; iteration < 40; ++iteration) {
        const Complex s = std::tanh(0.5 * p);
        const Complex miss = logLine(model, p, s) + logLoss(model, s) + Complex(0.0, 2.0 * pi * turns);
        Complex step = -times(miss, inverse(logLoopSlope(model, s)));
        // A step longer than a tenth of a partial may jump to the next one.
        const double longest = 0.1 * p.imag() / std::max(1.0, turns) + 1e-6;
        const double length = std::abs(step);
        if (!(length < 1e3))
            break;
        if (length > longest)
            step *= longest / length;
        p += step;
        if (!(p.imag() > 0.0 && p.imag() < pi))
            break;
        if (length < 1e-14 + 1e-13 * std::abs(p))
            return p;
    }
    const double none = std::numeric_limits<double>::quiet_NaN();
    return {none, none};
}

LoopDesign designOf(const LoopModel& model) {
    LoopDesign design;
    design.delay = static_cast<int>(std::lround(model.straightDelay));
    design.thiran = thiranCoefficient(model.thiranDelay);
    design.gain = std::exp(-model.loss);
    design.sections = model.sections;
    design.shelves = model.shelves;
    return design;
}

LoopModel modelOf(const LoopDesign& design) {
    LoopModel model;
    model.straightDelay = design.delay;
    model.thiranDelay = thiranDelay(design.thiran);
    model.loss = -std::log(design.gain);
    model.leastLoss = 0.5 * model.loss;
    model.sections = design.sections;
    model.shelves = design.shelves;
    return model;
}

ShelfLoss::ShelfLoss(const LossShelf& shelf) noexcept
    : high_(shelf.loses == LossShelf::Loses::high), steep_(shelf.order == 2),
      overCorner2_(1.0 / (shelf.corner * shelf.corner)), order_(shelf.order),
      g_(std::exp(-2.0 * order_ * shelf.depth)), lost_(-std::expm1(-2.0 * order_ * shelf.depth)),
      depth_(order_ * shelf.depth) {}

ShelfLoss::At ShelfLoss::at(double x2) const noexcept {
    // With q = (x/w)^2m: 1/|H|² = (1 + q)/(1 + g·q), or (1 + q)/(g + q) for a low shelf.
    const double ratio = x2 * overCorner2_, q = steep_ ? ratio * ratio : ratio;
    const double over = 1.0 / (high_ ? 1.0 + g_ * q : g_ + q);
    const double excess = lost_ * over * (high_ ? q : 1.0);
    const double byCorner = order_ * q * over * lost_ / (1.0 + q);
    return {excess, high_ ? -byCorner : byCorner, depth_ * g_ * over * (high_ ? q : 1.0)};
}

double circleLoss(const LoopModel& model, double omega) {
    const double x = std::tan(0.5 * omega);
    double loss = model.loss;
    for (const LossShelf& shelf : model.shelves)
        loss += 0.5 * std::log1p(ShelfLoss(shelf).at(x * x).excess);
    return loss;
}

double peakGain(const LoopDesign& design) {
    const LoopModel model = modelOf(design);
    constexpr int points = 1024;
    const double lowest = 1e-4; // of tan(ω/2)
    double least = std::numeric_limits<double>::infinity();
    for (int i = 0; i <= points + 1; ++i) {
        // Rest, then evenly in ln tan(ω/2) through to its mirror image below half the rate, then half the rate.
        const double x = lowest * std::pow(1.0 / (lowest * lowest), (i - 1.0) / (points - 1.0));
        const double omega = i == 0 ? 0.0 : i > points ? pi : 2.0 * std::atan(x);
        least = std::min(least, circleLoss(model, omega));
    }
    return std::exp(-least);
}

} // namespace hitchpin::design
