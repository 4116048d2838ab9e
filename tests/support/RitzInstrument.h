// An oracle that shares nothing with loops or junctions: strings and board as masses, springs and dampers.
#pragma once

#include "dsp/board/Soundboard.h"

#include <Eigen/Dense>

#include <algorithm>
#include <cmath>
#include <complex>
#include <numbers>
#include <vector>

namespace hitchpin::support {

/// A hinged string at one place of a board, swinging into the board and, where the board moves so, across.
struct RitzString {
    double length, tension, linearDensity, bendingStiffness;
    std::vector<double> decayRates; ///< of the string alone, 1/s; as many as terms are wanted
    board::Sharing place;           ///< on the board
};

struct RitzMatrices {
    Eigen::MatrixXd m, c, k;
    std::vector<Eigen::Index> firstTerm; ///< of each string, into the board: its terms follow each other
};

/// M·q̈ + C·q̇ + K·q = 0 in the coordinates: the board's modes; what the remainder lets each point yield; and then Σ aₙ sin(nπx/L) of each string and direction, riding on the straight line from the nut to its end
/// y at the bridge, y = Σ φ·u + x (Rayleigh and Ritz; the line takes up the slow part of the series, what is left falls as
/// 1/N³).
/// Kinetic energy of a string: μ/2·∫(ẏx/L + Σȧₙ sin)² = μL/2·(ẏ²/3 + Σȧₙ²/2 + 2ẏΣȧₙ(−1)ⁿ⁺¹/nπ); potential: T/2·(y²/L +
/// Σaₙ²(nπ)²/2L) + EI/2·Σaₙ²(nπ/L)⁴L/2. Derived here from the energies; textbook mechanics.
inline RitzMatrices ritzMatrices(const board::Board& board, const std::vector<RitzString>& strings) {
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
inline Eigen::MatrixXd firstOrder(const RitzMatrices& of) {
    const Eigen::Index size = of.m.rows();
    const Eigen::LLT<Eigen::MatrixXd> mass(of.m);
    Eigen::MatrixXd first(2 * size, 2 * size);
    first << Eigen::MatrixXd::Zero(size, size), Eigen::MatrixXd::Identity(size, size), -mass.solve(of.k), -mass.solve(of.c);
    return first;
}

/// Complex frequencies s with Im s > 0, by rising frequency.
inline std::vector<std::complex<double>> ritzPoles(const board::Board& board, const std::vector<RitzString>& strings) {
    const Eigen::VectorXcd values = firstOrder(ritzMatrices(board, strings)).eigenvalues();
    std::vector<std::complex<double>> poles;
    for (const auto& value : values)
        if (value.imag() > 1e-6)
            poles.push_back(value);
    std::sort(poles.begin(), poles.end(), [](auto a, auto b) { return a.imag() < b.imag(); });
    return poles;
}

} // namespace hitchpin::support
