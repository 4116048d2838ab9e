#include "tests/support/RitzInstrument.h"

#include "dsp/base/Elimination.h"

#include <Eigen/Eigenvalues>

#include <algorithm>
#include <cmath>
#include <numbers>

namespace hitchpin::support {

namespace {

struct RitzMatrices {
    Eigen::MatrixXd m, c, k;
    std::vector<Eigen::Index> firstTerm; ///< of each string, into the board: its terms follow each other
};

/// M·q̈ + C·q̇ + K·q = 0 in the coordinates: the board's modes; what the remainder lets each point yield; and then
/// Σ aₙ sin(nπx/L) of each string and direction, riding on the straight line from the nut to its end y at the bridge,
/// y = Σ φ·u + x (Rayleigh and Ritz; the line takes up the slow part of the series, what is left falls as 1/N³).
/// Kinetic energy of a string: μ/2·∫(ẏx/L + Σȧₙ sin)² = μL/2·(ẏ²/3 + Σȧₙ²/2 + 2ẏΣȧₙ(−1)ⁿ⁺¹/nπ); potential: T/2·(y²/L +
/// Σaₙ²(nπ)²/2L) + EI/2·Σaₙ²(nπ/L)⁴L/2. Derived here from the energies; textbook mechanics.
RitzMatrices ritzMatrices(const board::Board& board, const std::vector<RitzString>& strings) {
    constexpr double pi = std::numbers::pi;
    bool movesAcross = false;
    for (const board::Mode& mode : board.modes)
        movesAcross = movesAcross || std::abs(std::cos(mode.angle)) > 1e-9;
    const int directions = movesAcross ? 2 : 1, points = static_cast<int>(board.points.size());
    const auto modes = static_cast<Eigen::Index>(board.modes.size());
    Eigen::Index size = modes + points;
    for (const RitzString& string : strings)
        size += directions * static_cast<Eigen::Index>(string.decayRates.size());
    Eigen::MatrixXd m = Eigen::MatrixXd::Zero(size, size), c = m, k = m;
    for (Eigen::Index i = 0; i < modes; ++i) {
        const board::Mode& mode = board.modes[static_cast<std::size_t>(i)];
        const double w = 2.0 * pi * mode.frequency;
        m(i, i) = mode.mass;
        c(i, i) = mode.mass * w / mode.q;
        k(i, i) = mode.mass * w * w;
    }
    for (Eigen::Index p = 0; p < points; ++p) {
        c(modes + p, modes + p) = board.points[static_cast<std::size_t>(p)].resistance;
        m(modes + p, modes + p) = 1e-7; // kg: next to nothing, where no string lends a point its mass
    }
    Eigen::Index next = modes + points;
    std::vector<Eigen::Index> firstTerm;
    for (const RitzString& string : strings) {
        const board::Sharing& place = string.place;
        const double l = string.length, mu = string.linearDensity;
        for (int direction = 2 - directions; direction < 2; ++direction) {
            // The string's end over the coordinates.
            Eigen::VectorXd end = Eigen::VectorXd::Zero(size);
            for (Eigen::Index i = 0; i < modes; ++i) {
                const board::Mode& mode = board.modes[static_cast<std::size_t>(i)];
                end[i] = board::shapeAt(mode, place) * (direction == 0 ? std::cos(mode.angle) : std::sin(mode.angle));
            }
            if (direction == 1) {
                end[modes + place.first] = place.ofFirst;
                if (place.ofSecond != 0.0)
                    end[modes + place.first + 1] = place.ofSecond;
            }
            m += mu * l / 3.0 * end * end.transpose();
            k += string.tension / l * end * end.transpose();
            if (direction == 1)
                firstTerm.push_back(next);
            for (std::size_t i = 0; i < string.decayRates.size(); ++i, ++next) {
                const double n = static_cast<double>(i) + 1.0, wave = n * pi / l;
                m(next, next) = 0.5 * mu * l;
                c(next, next) = mu * l * string.decayRates[i];
                k(next, next) = 0.5 * l * (string.tension * wave * wave + string.bendingStiffness * std::pow(wave, 4));
                const double shared = mu * l * (i % 2 == 0 ? 1.0 : -1.0) / (n * pi);
                m.row(next) += shared * end.transpose();
                m.col(next) += shared * end;
            }
        }
    }
    return {std::move(m), std::move(c), std::move(k), std::move(firstTerm)};
}

/// d/dt (q, q̇) = first·(q, q̇).
Eigen::MatrixXd firstOrder(const RitzMatrices& of) {
    const Eigen::Index size = of.m.rows();
    using RowMajor = Eigen::Matrix<double, Eigen::Dynamic, Eigen::Dynamic, Eigen::RowMajor>;
    RowMajor mass = of.m, forces(size, 2 * size);
    forces << of.k, of.c;
    eliminate(mass.data(), forces.data(), static_cast<std::size_t>(size), static_cast<std::size_t>(2 * size));
    Eigen::MatrixXd first = Eigen::MatrixXd::Zero(2 * size, 2 * size);
    first.topRightCorner(size, size).setIdentity();
    first.bottomRows(size) = -forces;
    return first;
}

} // namespace

std::vector<std::complex<double>> ritzPoles(const board::Board& board, const std::vector<RitzString>& strings) {
    const Eigen::VectorXcd values = firstOrder(ritzMatrices(board, strings)).eigenvalues();
    std::vector<std::complex<double>> poles;
    for (const auto& value : values)
        if (value.imag() > 1e-6)
            poles.push_back(value);
    std::sort(poles.begin(), poles.end(), [](auto a, auto b) { return a.imag() < b.imag(); });
    return poles;
}

double ritzEnergyAfter(const board::Board& board, const std::vector<RitzString>& strings, std::size_t plucked,
                       double ratioFromBridge, std::size_t heard, double seconds) {
    const RitzMatrices of = ritzMatrices(board, strings);
    const Eigen::Index size = of.m.rows(), at = of.firstTerm[plucked], other = of.firstTerm[heard];
    Eigen::VectorXcd state = Eigen::VectorXcd::Zero(2 * size);
    // The shape that a newton holds; x runs from the nut.
    for (std::size_t i = 0; i < strings[plucked].decayRates.size(); ++i) {
        const auto term = at + static_cast<Eigen::Index>(i);
        const double n = static_cast<double>(i) + 1.0;
        state[term] = std::sin(n * std::numbers::pi * (1.0 - ratioFromBridge)) / of.k(term, term);
    }
    const Eigen::EigenSolver<Eigen::MatrixXd> solver(firstOrder(of));
    const Eigen::MatrixXcd vectors = solver.eigenvectors();
    Eigen::Matrix<std::complex<double>, Eigen::Dynamic, Eigen::Dynamic, Eigen::RowMajor> rows = vectors;
    Eigen::VectorXcd shares = state;
    eliminate(rows.data(), shares.data(), static_cast<std::size_t>(2 * size), 1);
    Eigen::VectorXd then = Eigen::VectorXd::Zero(2 * size);
    for (Eigen::Index i = 0; i < shares.size(); ++i)
        then += (std::exp(solver.eigenvalues()[i] * seconds) * shares[i] * vectors.col(i)).real();
    double energy = 0.0;
    for (std::size_t i = 0; i < strings[heard].decayRates.size(); ++i) {
        const auto term = other + static_cast<Eigen::Index>(i);
        energy += 0.5 * of.k(term, term) * std::pow(then[term], 2) + 0.5 * of.m(term, term) * std::pow(then[size + term], 2);
    }
    return energy;
}

} // namespace hitchpin::support
