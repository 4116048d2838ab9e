#include "dsp/analysis/CheckPoles.h"

#include "dsp/analysis/Band.h"

#include <Eigen/QR>

#include <algorithm>
#include <cmath>
#include <complex>
#include <limits>
#include <numbers>
#include <utility>

namespace hitchpin::analysis {

namespace {

using Complex = std::complex<double>;
constexpr double pi = std::numbers::pi;

/// What is beyond a band is put down by this.
constexpr double stopbandDb = 160.0;
/// Width of the part of a band whose poles are measured, Hz; the band itself is twice as wide on either side.
constexpr double measuredHz = 40.0;
constexpr std::size_t mostSamples = 4096;

/// One pole within a band: rate a band sample.
struct Member {
    std::size_t index;
    Complex rate;
};

/// z^m, or m·z^m.
void fill(Eigen::MatrixXcd& basis, Eigen::Index column, Complex rate, bool slope) {
    for (Eigen::Index m = 0; m < basis.rows(); ++m) {
        const auto at = static_cast<double>(m);
        basis(m, column) = (slope ? at : 1.0) * std::exp(rate * at);
    }
}

std::vector<std::pair<std::size_t, CheckedPole>> checkBand(const Band& band, const std::vector<Member>& members,
                                                           double sampleRate) {
    const auto count = static_cast<Eigen::Index>(members.size());
    const Eigen::Map<const Eigen::VectorXcd> samples(band.samples.data(), static_cast<Eigen::Index>(band.samples.size()));
    if (samples.size() < 2 * count + 8)
        return {};
    std::vector<std::pair<std::size_t, CheckedPole>> checked;
    Eigen::MatrixXcd basis(samples.size(), 2 * count);
    Eigen::VectorXd scale(2 * count);
    const auto solve = [&](bool withRates) {
        const Eigen::Index columns = withRates ? 2 * count : count;
        for (Eigen::Index k = 0; k < columns; ++k) {
            fill(basis, k, members[static_cast<std::size_t>(k % count)].rate, k >= count);
            scale[k] = 1.0 / basis.col(k).norm();
            basis.col(k) *= scale[k];
        }
        Eigen::HouseholderQR<Eigen::MatrixXcd> qr(basis.leftCols(columns));
        const Eigen::VectorXcd solution = scale.head(columns).cwiseProduct(qr.solve(samples));
        return std::pair(qr, solution);
    };
    const auto [plainQr, weights] = solve(false);
    const Eigen::VectorXcd missed =
        samples - basis.leftCols(count) * scale.head(count).cwiseInverse().cwiseProduct(weights);
    const double unexplained = missed.squaredNorm() / samples.squaredNorm();
    // Linearised in the rates: a·e^((r+δ)m) ≈ a·e^(rm) + aδ·m·e^(rm), so that aδ comes out beside a. What is left says
    // how well each is known.
    const auto [qr, solution] = solve(true);
    const Eigen::VectorXcd left = samples - basis * scale.cwiseInverse().cwiseProduct(solution);
    const double variance = left.squaredNorm() / static_cast<double>(samples.size() - 2 * count);
    const Eigen::MatrixXcd upper = qr.matrixQR().topRows(2 * count).triangularView<Eigen::Upper>();
    const Eigen::MatrixXcd inverse =
        upper.triangularView<Eigen::Upper>().solve(Eigen::MatrixXcd::Identity(2 * count, 2 * count));
    for (Eigen::Index k = 0; k < count; ++k) {
        const Member& member = members[static_cast<std::size_t>(k)];
        const Complex q = (member.rate + solution[count + k] / solution[k]) / static_cast<double>(band.step);
        CheckedPole pole;
        pole.measured = {(band.centre + q.imag()) * sampleRate / (2.0 * pi), -q.real() * sampleRate};
        const Complex weight = solution[k] * std::exp(-q * static_cast<double>(band.first)) / band.response(q);
        pole.amplitude = 2.0 * std::abs(weight);
        pole.error = std::sqrt(variance) * scale[count + k] * inverse.row(count + k).norm() / std::abs(solution[k]) /
                     static_cast<double>(band.step) * sampleRate;
        pole.unexplained = unexplained;
        checked.emplace_back(member.index, pole);
    }
    return checked;
}

} // namespace

std::vector<CheckedPole> checkPoles(std::span<const double> sound, double sampleRate,
                                    std::span<const Pole> predicted) {
    const double none = std::numeric_limits<double>::infinity();
    std::vector<CheckedPole> checked;
    for (const Pole& pole : predicted)
        checked.push_back({pole, 0.0, none, 1.0});
    if (predicted.empty())
        return checked;
    const double gapHz = 2.0 * measuredHz, toRadians = 2.0 * pi / sampleRate;
    for (double from = std::max(0.0, predicted.front().frequency - 1.0); from <= predicted.back().frequency;
         from += measuredHz) {
        const double centre = from + 0.5 * measuredHz;
        const auto isOwn = [&](const Pole& pole) { return pole.frequency >= from && pole.frequency < from + measuredHz; };
        if (std::none_of(predicted.begin(), predicted.end(), isOwn))
            continue;
        std::vector<Member> members;
        for (std::size_t i = 0; i < predicted.size(); ++i) {
            if (std::abs(predicted[i].frequency - centre) > 0.8 * gapHz)
                continue;
            const Complex q(-predicted[i].decayRate / sampleRate, (predicted[i].frequency - centre) * toRadians);
            members.push_back({i, q});
        }
        const Band band = bandAround(sound, centre * toRadians, gapHz * toRadians, stopbandDb, mostSamples);
        for (Member& member : members)
            member.rate *= static_cast<double>(band.step);
        for (const auto& [index, pole] : checkBand(band, members, sampleRate))
            if (isOwn(predicted[index]))
                checked[index] = pole;
    }
    return checked;
}

} // namespace hitchpin::analysis
