#include "dsp/design/CoupledPoles.h"

#include "dsp/base/Elimination.h"
#include "dsp/design/LoopModel.h"
#include "dsp/design/ModeFilter.h"

#include <Eigen/Core>

#include <algorithm>
#include <array>
#include <cmath>
#include <complex>
#include <numbers>

namespace hitchpin::design {

namespace {

using Complex = std::complex<double>;
using Matrix = Eigen::Matrix<Complex, Eigen::Dynamic, Eigen::Dynamic, Eigen::RowMajor>;
constexpr double pi = std::numbers::pi;
constexpr int mostRounds = 96;
/// A root that has not settled within so many rounds has lost its way among the others, and begins anew elsewhere.
constexpr int patience = 16;
/// Hz: steps of the look for roots that were missed, and how often it is repeated.
constexpr double lookStep = 0.5;
constexpr int mostLooks = 6;

/// Strings with the same loop at the same place.
struct Alike {
    int first = 0; ///< index into the design's strings
    int count = 1;
    double turn = 1.0;
    LoopModel loop;
    Eigen::VectorXd weights; ///< over the board's points
    double impedance = 0.0;  ///< of all together
};

bool sameLoop(const LoopDesign& a, const LoopDesign& b) {
    const auto sameModel = [](const LoopModel& x, const LoopModel& y) { return constantsOf(x) == constantsOf(y); };
    return a.delay == b.delay && a.turn == b.turn && a.sections.size() == b.sections.size() &&
           a.shelves.size() == b.shelves.size() && sameModel(modelOf(a), modelOf(b));
}

class Equation {
public:
    Equation(const InstrumentDesign& design, int board) {
        const BoardDesign& from = design.boards[static_cast<std::size_t>(board)];
        points_ = std::ssize(from.points);
        for (std::size_t i = 0; i < design.strings.size(); ++i) {
            const StringDesign& string = design.strings[i];
            if (string.board != board || string.ends.bridge == string::End::free)
                continue;
            const LoopDesign& loop = string.stops.front().loop;
            const auto twin = std::find_if(strings_.begin(), strings_.end(), [&](const Alike& other) {
                const StringDesign& first = design.strings[static_cast<std::size_t>(other.first)];
                return first.place == string.place && sameLoop(first.stops.front().loop, loop);
            });
            if (twin != strings_.end()) {
                ++twin->count;
                twin->impedance += string.impedance;
                continue;
            }
            const board::Sharing& place = string.place;
            Eigen::VectorXd weights = Eigen::VectorXd::Zero(points_);
            weights[place.first] = place.ofFirst;
            if (place.ofSecond != 0.0)
                weights[place.first + 1] = place.ofSecond;
            strings_.push_back({static_cast<int>(i), 1, loop.turn, modelOf(loop), std::move(weights),
                                string.impedance});
        }
        movesAcross_ = board::movesAcross(from.modes);
        for (const board::Mode& mode : from.modes)
            modes_.push_back({responseOf(modeFilter(mode, design.sampleRate)), {}});
        const Eigen::Index size = movesAcross_ ? 2 * points_ : points_;
        for (std::size_t m = 0; m < modes_.size(); ++m) {
            const board::Mode& mode = from.modes[m];
            const Eigen::Map<const Eigen::VectorXd> shape(mode.shape.data(), points_);
            modes_[m].motion.resize(size);
            if (movesAcross_)
                modes_[m].motion << std::cos(mode.angle) * shape, std::sin(mode.angle) * shape;
            else
                modes_[m].motion = std::sin(mode.angle) * shape;
        }
        remainder_ = Eigen::VectorXd::Zero(size);
        for (Eigen::Index p = 0; p < points_; ++p)
            remainder_[size - points_ + p] = 1.0 / from.points[static_cast<std::size_t>(p)].resistance;
    }

    const std::vector<Alike>& strings() const { return strings_; }
    bool movesAcross() const { return movesAcross_; }
    std::size_t modeCount() const { return modes_.size(); }
    Complex modePole(std::size_t m) const {
        const auto [gain, a, b] = modes_[m].response;
        return 2.0 * std::atanh(-0.5 * a + std::sqrt(Complex(0.25 * a * a - b)));
    }

    /// Where a pole of a string goes at first order: one shift for each direction.
    std::array<Complex, 2> firstShifts(const Alike& string, Complex p) const {
        const Matrix y = mobility(p, nullptr);
        const double impedance = string.impedance;
        const Complex byTurn = 2.0 / logLoopSlope(string.loop, std::tanh(0.5 * p)) * impedance;
        const auto here = [&](Eigen::Index row, Eigen::Index column) {
            return string.weights.dot(y.block(row, column, points_, points_).lazyProduct(string.weights).eval());
        };
        if (!movesAcross_)
            return {byTurn * here(0, 0), 0.0};
        const Complex a = here(0, 0), b = here(0, points_), c = here(points_, points_);
        const Complex root = std::sqrt(0.25 * (a - c) * (a - c) + b * b);
        return {byTurn * (0.5 * (a + c) + root), byTurn * (0.5 * (a + c) - root)};
    }

    /// d ln g/dp of g = det(1 + Y·Z)·∏(1 − L)·∏(modes' denominators), which has all roots and no poles.
    Complex logSlope(Complex p) const {
        const Eigen::Index size = remainder_.size();
        Matrix slope, y = mobility(p, &slope), z = Matrix::Zero(size, size), zSlope = z;
        Complex sum = 0.0;
        const Complex s = std::tanh(0.5 * p);
        const double directions = movesAcross_ ? 2.0 : 1.0;
        for (const Alike& string : strings_) {
            const Complex loop = string.turn * std::exp(logLine(string.loop, p, s) + logLoss(string.loop, s));
            const Complex loopSlope = loop * logLoopSlope(string.loop, s), open = 1.0 - loop;
            sum -= directions * loopSlope / open;
            const Complex impedance = string.impedance * (1.0 + loop) / open,
                          impedanceSlope = string.impedance * 2.0 * loopSlope / (open * open);
            const Eigen::MatrixXd place = string.weights * string.weights.transpose();
            for (Eigen::Index at = 0; at < size; at += points_) {
                z.block(at, at, points_, points_) += impedance * place;
                zSlope.block(at, at, points_, points_) += impedanceSlope * place;
            }
        }
        for (const Moving& mode : modes_) {
            const auto [gain, a, b] = mode.response;
            sum += (2.0 * s + a) / (s * s + a * s + b) * 0.5 * (1.0 - s * s);
        }
        // Small: products written out are quicker than blocked ones.
        Matrix inside = Matrix::Identity(size, size) + y.lazyProduct(z);
        Matrix moved = slope.lazyProduct(z) + y.lazyProduct(zSlope);
        eliminate(inside.data(), moved.data(), static_cast<std::size_t>(size), static_cast<std::size_t>(size));
        return sum + moved.trace();
    }

private:
    struct Moving {
        ModeResponse response;
        Eigen::VectorXd motion;
    };

    Matrix mobility(Complex p, Matrix* slope) const {
        Matrix y = remainder_.cast<Complex>().asDiagonal();
        if (slope != nullptr)
            slope->setZero(y.rows(), y.cols());
        const Complex s = std::tanh(0.5 * p);
        for (const Moving& mode : modes_) {
            const auto [gain, a, b] = mode.response;
            const Complex below = s * s + a * s + b;
            const Eigen::MatrixXd motion = mode.motion * mode.motion.transpose();
            y += gain * s / below * motion;
            if (slope != nullptr)
                *slope += gain * (b - s * s) / (below * below) * 0.5 * (1.0 - s * s) * motion;
        }
        return y;
    }

    Eigen::Index points_ = 1;
    bool movesAcross_ = false;
    std::vector<Alike> strings_;
    std::vector<Moving> modes_;
    Eigen::VectorXd remainder_;
};

struct Root {
    Complex p;
    CoupledPole from;
    Complex start = p;
    int tries = 0;
    bool settled = false;

    /// Around where it began, further each time, by the golden angle; always on the side that decays.
    void beginAnew() {
        ++tries;
        const double reach = 0.25 * tries * std::max(std::abs(start.real()), 1e-4 * start.imag());
        p = start + std::polar(reach, 2.4 * tries);
        p.real(-std::abs(p.real()));
    }
};

/// One step of Aberth's: Newton's for this root with all others divided out.
void step(Root& root, const std::vector<Root>& roots, const Equation& equation) {
    Complex others = 0.0;
    for (const Root& other : roots)
        if (&other != &root)
            others += 1.0 / (root.p - other.p);
    Complex move = 1.0 / (equation.logSlope(root.p) - others);
    const double length = std::abs(move), longest = 0.02 * root.p.imag();
    if (!std::isfinite(length)) {
        root.p *= 1.0 + 1e-7;
        return;
    }
    if (length > longest)
        move *= longest / length;
    root.p -= move;
    // Nothing here gains: a step into growth was too long.
    if (root.p.real() > 0.0)
        root.p.real(-0.01 * root.p.real());
    root.settled = length < 1e-13 + 1e-12 * std::abs(root.p);
}

/// Puts the roots that have not settled where some were missed. With all settled ones divided out, what is left of
/// d ln g/dp along the border of growth is smooth but for 1/(p − p*) of each one missing: where it bends most,
/// p* = p − 1/√(−slope).
void lookForMissing(std::vector<Root>& roots, const Equation& equation, double highest, double sampleRate) {
    const double spacing = 2.0 * pi * lookStep / sampleRate;
    struct Bend {
        double size;
        Complex guess;
    };
    std::vector<Bend> bends;
    std::array<Complex, 3> left{};
    for (int i = 1; i * spacing < highest; ++i) {
        const Complex p(0.02 * spacing, i * spacing);
        left[0] = left[1];
        left[1] = left[2];
        left[2] = equation.logSlope(p);
        for (const Root& root : roots)
            if (root.settled)
                left[2] -= 1.0 / (p - root.p);
        if (i < 3 || !std::isfinite(std::abs(left[2])))
            continue;
        const Complex slope = (left[2] - left[0]) / Complex(0.0, 2.0 * spacing);
        Complex away = 1.0 / std::sqrt(-slope);
        if (away.real() < 0.0)
            away = -away;
        bends.push_back({std::abs(slope), p - Complex(0.0, spacing) - away});
    }
    std::vector<Bend> peaks;
    for (std::size_t i = 1; i + 1 < bends.size(); ++i)
        if (bends[i].size >= bends[i - 1].size && bends[i].size > bends[i + 1].size)
            peaks.push_back(bends[i]);
    std::sort(peaks.begin(), peaks.end(), [](const Bend& a, const Bend& b) { return a.size > b.size; });
    std::size_t next = 0;
    for (Root& root : roots)
        if (!root.settled && next < peaks.size())
            root.p = root.start = peaks[next++].guess;
}

/// Poles of a string's loop where the bridge stands still, up to `highest` (rad a sample).
std::vector<Complex> ownPoles(const Alike& string, const LoopDesign& design, double highest) {
    std::vector<Complex> poles;
    Complex before = 0.0;
    const double first = 2.0 * pi * design.firstPartialHz / design.sampleRate;
    double spacing = design.turn < 0.0 ? 2.0 * first : first;
    for (int n = 1;; ++n) {
        const Complex start = n == 1 ? Complex(-1e-6, first) : before + Complex(0.0, spacing);
        if (start.imag() > highest)
            break;
        const Complex pole = loopPole(string.loop, design.turn < 0.0 ? n - 0.5 : n, start);
        if (std::isnan(pole.imag()) || pole.imag() > highest)
            break;
        if (n > 1)
            spacing = pole.imag() - before.imag();
        poles.push_back(pole);
        before = pole;
    }
    return poles;
}

} // namespace

CoupledPoles coupledPoles(const InstrumentDesign& design, int board, double highestHz, const Progress& progress) {
    const Equation equation(design, board);
    const double perSample = 2.0 * pi / design.sampleRate;
    // A little further, so that roots at the border have their neighbours.
    const double highest = std::min(1.05 * highestHz, 0.45 * design.sampleRate) * perSample;
    CoupledPoles found;
    std::vector<Root> roots;
    const auto poleAt = [&](const Root& root) {
        CoupledPole pole = root.from;
        pole.frequency = root.p.imag() / perSample;
        pole.decayRate = -root.p.real() * design.sampleRate;
        return pole;
    };
    for (const Alike& string : equation.strings()) {
        const LoopDesign& loop = design.strings[static_cast<std::size_t>(string.first)].stops.front().loop;
        const auto own = ownPoles(string, loop, highest);
        for (std::size_t i = 0; i < own.size(); ++i) {
            const int n = static_cast<int>(i) + 1;
            const auto shifts = equation.firstShifts(string, own[i]);
            // A hair apart, so that no two start on one spot.
            const Complex apart = Complex(1.0, 0.5) * 1e-9 * own[i].imag() / (1.0 + string.first % 97);
            for (int direction = 0; direction < (equation.movesAcross() ? 2 : 1); ++direction) {
                // No further than a partial: next to a strong mode the first order would say anything.
                Complex shift = shifts[static_cast<std::size_t>(direction)];
                const double longest = 0.1 * own[0].imag();
                if (std::abs(shift) > longest)
                    shift *= longest / std::abs(shift);
                roots.push_back({own[i] + shift + static_cast<double>(direction + 1) * apart,
                                 {0.0, 0.0, string.first, n, false}});
                for (int other = 1; other < string.count; ++other)
                    found.poles.push_back(poleAt({own[i], {0.0, 0.0, string.first, n, true}}));
            }
        }
    }
    // Beside the mode's own pole, on which the equation has no value.
    for (std::size_t m = 0; m < equation.modeCount(); ++m)
        roots.push_back({(1.0 + 1e-4 / (1.0 + static_cast<double>(m))) * equation.modePole(m), {0.0, 0.0, -1, static_cast<int>(m), false}});

    bool goOn = true;
    const auto settle = [&](int rounds) {
        const auto settled = [&] { return std::count_if(roots.begin(), roots.end(), [](const Root& r) { return r.settled; }); };
        for (int round = 0; round < rounds && goOn && settled() < std::ssize(roots); ++round) {
            goOn = !progress || progress(static_cast<double>(settled()) / static_cast<double>(roots.size()));
            for (Root& root : roots) {
                if (!root.settled && round > 0 && round % patience == 0)
                    root.beginAnew();
                if (!root.settled)
                    step(root, roots, equation);
            }
        }
        return settled() == std::ssize(roots);
    };
    bool all = settle(mostRounds);
    for (int look = 0; look < mostLooks && !all && goOn; ++look) {
        lookForMissing(roots, equation, highest, design.sampleRate);
        all = settle(3 * patience);
    }
    for (const Root& root : roots)
        if (root.settled)
            found.poles.push_back(poleAt(root));
        else
            ++found.notSettled;
    std::erase_if(found.poles, [&](const CoupledPole& pole) { return pole.frequency > highestHz; });
    std::sort(found.poles.begin(), found.poles.end(),
              [](const CoupledPole& a, const CoupledPole& b) { return a.frequency < b.frequency; });
    return found;
}

} // namespace hitchpin::design
