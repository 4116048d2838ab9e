#include "dsp/analysis/Measure.h"

#include "dsp/analysis/Band.h"
#include "dsp/base/LeastSquares.h"

#include <Eigen/Eigenvalues>
#include <Eigen/QR>

#include <algorithm>
#include <cmath>
#include <complex>
#include <limits>
#include <numbers>
#include <optional>

namespace hitchpin::analysis {

namespace {

using Complex = std::complex<double>;
constexpr double pi = std::numbers::pi;

/// Band filter: what lies further off than three quarters of the way to the next partial is put down by this.
constexpr double stopbandDb = 100.0;
/// Samples of the band from which the first estimate is made, and the most that are used at all.
constexpr std::size_t firstCount = 96;
constexpr std::size_t mostSamples = 3072;
/// Partials that one band is allowed to hold: its own, a twin, what leaks in from both sides, a rest.
constexpr Eigen::Index mostPoles = 5;
/// Left over by the poles found, as a share of the band's energy: more than this may be a twin, and is one if
/// it takes most of it away.
constexpr double suspicious = 1e-4;
constexpr double twinShare = 0.2;
/// Against the whole sound's mean square: weaker bands hold rounding errors alone.
constexpr double leastShare = 1e-26;

/// One damped exponential of a band: weight·e^(rate·m).
struct Exponential {
    Complex rate;
    Complex weight;
    double energy(std::size_t count) const {
        const double growth = 2.0 * rate.real(), n = static_cast<double>(count);
        const double sum = std::abs(growth) < 1e-9 ? n : std::expm1(growth * n) / std::expm1(growth);
        return std::norm(weight) * sum;
    }
};

/// Weights of given rates, by linear least squares.
void fitWeights(std::vector<Exponential>& poles, const Eigen::VectorXcd& samples) {
    Eigen::MatrixXcd basis(samples.size(), static_cast<Eigen::Index>(poles.size()));
    for (Eigen::Index k = 0; k < basis.cols(); ++k)
        for (Eigen::Index m = 0; m < basis.rows(); ++m)
            basis(m, k) = std::exp(poles[static_cast<std::size_t>(k)].rate * static_cast<double>(m));
    const Eigen::VectorXcd weights = basis.colPivHouseholderQr().solve(samples);
    for (std::size_t k = 0; k < poles.size(); ++k)
        poles[k].weight = weights[static_cast<Eigen::Index>(k)];
}

/// First estimate: ESPRIT (Roy and Kailath 1989), the rotation between the two shifted halves of the signal
/// subspace. Empty where nothing stands out of the noise.
std::vector<Exponential> firstEstimate(const Eigen::VectorXcd& samples) {
    const Eigen::Index rows = std::max<Eigen::Index>(2, samples.size() / 3),
                       columns = samples.size() - rows + 1;
    Eigen::MatrixXcd shifted(rows, columns);
    for (Eigen::Index j = 0; j < columns; ++j)
        shifted.col(j) = samples.segment(j, rows);
    const Eigen::SelfAdjointEigenSolver<Eigen::MatrixXcd> solver(shifted * shifted.adjoint());
    const Eigen::VectorXd& powers = solver.eigenvalues(); // rising
    const double strongest = powers[rows - 1];
    // Noise spreads over all directions alike, within a factor of about 3 in amplitude at this size.
    const double floor = std::max(16.0 * std::max(0.0, powers[rows / 2]), 1e-14 * strongest);
    Eigen::Index order = 0;
    while (order < std::min(mostPoles, rows - 1) && powers[rows - 1 - order] > floor)
        ++order;
    if (order == 0)
        return {};
    const Eigen::MatrixXcd space = solver.eigenvectors().rightCols(order);
    const Eigen::MatrixXcd rotation =
        space.topRows(rows - 1).colPivHouseholderQr().solve(space.bottomRows(rows - 1));
    const Eigen::VectorXcd roots = rotation.eigenvalues();
    std::vector<Exponential> poles;
    for (const Complex root : roots)
        if (std::abs(root) > 1e-3 && std::abs(root) < 1.5)
            poles.push_back({std::log(root), 0.0});
    if (!poles.empty())
        fitWeights(poles, samples);
    return poles;
}

/// Maximum likelihood in white noise: all rates and weights together. Returns the share of energy left over.
double refine(std::vector<Exponential>& poles, const Eigen::VectorXcd& samples) {
    const auto count = static_cast<std::size_t>(samples.size());
    const double scale = samples.cwiseAbs().maxCoeff();
    std::vector<double> unknowns;
    for (const Exponential& pole : poles)
        for (const double part :
             {pole.rate.real(), pole.rate.imag(), pole.weight.real() / scale, pole.weight.imag() / scale})
            unknowns.push_back(part);
    const double left = minimiseSquares(
        [&](std::span<const double> trial, std::span<double> residuals, std::span<double> jacobian) {
            for (std::size_t m = 0; m < count; ++m) {
                const Complex sample = samples[static_cast<Eigen::Index>(m)] / scale;
                residuals[m] = -sample.real();
                residuals[count + m] = -sample.imag();
            }
            for (std::size_t k = 0; k < poles.size(); ++k) {
                const Complex rate(trial[4 * k], trial[4 * k + 1]),
                    weight(trial[4 * k + 2], trial[4 * k + 3]);
                if (rate.real() * static_cast<double>(count) > 30.0)
                    return false;
                const Complex turn = std::exp(rate);
                Complex power = 1.0;
                for (std::size_t m = 0; m < count; ++m) {
                    if (m % 64 == 0) // keeps rounding from piling up
                        power = std::exp(rate * static_cast<double>(m));
                    const Complex value = weight * power, byRate = static_cast<double>(m) * value;
                    residuals[m] += value.real();
                    residuals[count + m] += value.imag();
                    if (!jacobian.empty()) {
                        double* column = jacobian.data() + 8 * k * count;
                        for (const Complex derivative :
                             {byRate, Complex(0.0, 1.0) * byRate, power, Complex(0.0, 1.0) * power}) {
                            column[m] = derivative.real();
                            column[count + m] = derivative.imag();
                            column += 2 * count;
                        }
                    }
                    power *= turn;
                }
            }
            return true;
        },
        unknowns, 2 * count, {.iterations = 40, .smallestImprovement = 1e-6});
    for (std::size_t k = 0; k < poles.size(); ++k)
        poles[k] = {{unknowns[4 * k], unknowns[4 * k + 1]},
                    scale * Complex(unknowns[4 * k + 2], unknowns[4 * k + 3])};
    return left * scale * scale / samples.squaredNorm();
}

/// The pole that holds most energy among those within `reach` of the band's centre.
std::optional<std::size_t> mainPole(const std::vector<Exponential>& poles, double reach, std::size_t count) {
    std::optional<std::size_t> best;
    for (std::size_t k = 0; k < poles.size(); ++k)
        if (std::abs(poles[k].rate.imag()) < reach &&
            (!best || poles[k].energy(count) > poles[*best].energy(count)))
            best = k;
    return best;
}

/// Two strings that beat slowly, or ring down in two stages, look like one partial over the first span. Where
/// one leaves much, a twin is tried beside it: a little higher or lower, or dying sooner or later.
double addTwin(std::vector<Exponential>& poles, std::size_t main, const Eigen::VectorXcd& samples,
               double residual) {
    const Complex rate = poles[main].rate;
    const double aside = pi / static_cast<double>(samples.size()),
                 faster = 0.5 * std::max(std::abs(rate.real()), aside);
    const std::vector<Exponential> alone = poles;
    for (const Complex offset :
         {Complex(0.0, aside), Complex(0.0, -aside), Complex(-faster, 0.0), Complex(faster, 0.0)}) {
        std::vector<Exponential> both = alone;
        both.push_back({rate + offset, 0.0});
        fitWeights(both, samples);
        const double left = refine(both, samples);
        if (left < twinShare * residual) {
            poles = both;
            residual = left;
        }
    }
    return residual;
}

MeasuredPartial measureBand(std::span<const double> sound, double sampleRate, double expectedHz, double gapHz,
                            double meanSquare) {
    const double centre = 2.0 * pi * expectedHz / sampleRate, gap = 2.0 * pi * gapHz / sampleRate;
    const Band band = bandAround(sound, centre, gap, stopbandDb, mostSamples);
    const Eigen::Map<const Eigen::VectorXcd> samples(band.samples.data(), static_cast<Eigen::Index>(band.samples.size()));
    const auto available = band.samples.size();
    if (available < 8 ||
        !(samples.squaredNorm() / static_cast<double>(available) > leastShare * meanSquare))
        return {};

    const double reach = 0.5 * gap * static_cast<double>(band.step);
    std::size_t count = std::min(firstCount, available);
    std::vector<Exponential> poles = firstEstimate(samples.head(static_cast<Eigen::Index>(count)));
    if (!mainPole(poles, reach, count))
        return {};
    double residual = refine(poles, samples.head(static_cast<Eigen::Index>(count)));
    while (count < available) {
        const auto main = mainPole(poles, reach, count);
        if (!main || poles[*main].rate.real() * static_cast<double>(count) < -20.0)
            break; // nothing of it is left further on
        const std::size_t next = std::min(2 * count, available);
        // What would grow without end over the longer span is not part of a sound that dies away.
        std::erase_if(poles, [&](const Exponential& pole) {
            return pole.rate.real() * static_cast<double>(next) > 5.0;
        });
        if (poles.empty())
            return {};
        count = next;
        residual = refine(poles, samples.head(static_cast<Eigen::Index>(count)));
    }

    auto main = mainPole(poles, reach, count);
    if (!main)
        return {};
    if (residual > suspicious && poles.size() < static_cast<std::size_t>(mostPoles)) {
        residual = addTwin(poles, *main, samples.head(static_cast<Eigen::Index>(count)), residual);
        main = mainPole(poles, reach, count);
        if (!main)
            return {};
    }
    const Complex q = poles[*main].rate / static_cast<double>(band.step);
    const Complex weight =
        poles[*main].weight * std::exp(-q * static_cast<double>(band.first)) / band.response(q);
    MeasuredPartial measured;
    measured.frequency = (centre + q.imag()) * sampleRate / (2.0 * pi);
    measured.decayRate = -q.real() * sampleRate;
    measured.t60 = measured.decayRate > 0.0 ? std::log(1000.0) / measured.decayRate
                                            : std::numeric_limits<double>::infinity();
    measured.amplitude = 2.0 * std::abs(weight);
    measured.residual = residual;
    return measured;
}

} // namespace

std::vector<MeasuredPartial> measurePartials(std::span<const double> sound, double sampleRate,
                                             std::span<const double> expectedHz) {
    std::vector<MeasuredPartial> measured(expectedHz.size());
    if (sound.size() < 16)
        return measured;
    double meanSquare = 0.0;
    for (const double sample : sound)
        meanSquare += sample * sample;
    meanSquare /= static_cast<double>(sound.size());
    for (std::size_t i = 0; i < expectedHz.size(); ++i) {
        const double expected = expectedHz[i];
        // Neighbours on both sides, rest and half the rate, and the mirror images behind those.
        double gap = std::min(expected, sampleRate - 2.0 * expected);
        if (i > 0)
            gap = std::min(gap, expected - expectedHz[i - 1]);
        if (i + 1 < expectedHz.size())
            gap = std::min(gap, expectedHz[i + 1] - expected);
        if (expected > 0.0 && gap > 0.0 && meanSquare > 0.0)
            measured[i] = measureBand(sound, sampleRate, expected, gap, meanSquare);
    }
    return measured;
}

double centsBetween(double frequency, double reference) {
    return 1200.0 * std::log2(frequency / reference);
}

} // namespace hitchpin::analysis
