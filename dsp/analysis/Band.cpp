#include "dsp/analysis/Band.h"

#include <Eigen/Core>

#include <algorithm>
#include <cmath>
#include <numbers>

namespace hitchpin::analysis {

namespace {

using Complex = std::complex<double>;
constexpr double pi = std::numbers::pi;

/// Kaiser (1974): window order and shape from the attenuation and the width of the transition (rad a sample).
std::vector<double> lowPass(double cutoff, double transition, double stopbandDb, std::size_t longest) {
    const double beta = 0.1102 * (stopbandDb - 8.7);
    const double order = std::ceil((stopbandDb - 8.0) / (2.285 * transition));
    const std::size_t count =
        std::max<std::size_t>(8, std::min(longest, static_cast<std::size_t>(order) + 1));
    std::vector<double> taps(count);
    double sum = 0.0;
    for (std::size_t i = 0; i < count; ++i) {
        const double centred = static_cast<double>(i) - 0.5 * static_cast<double>(count - 1);
        const double share = 2.0 * centred / static_cast<double>(count - 1);
        const double window = std::cyl_bessel_i(0.0, beta * std::sqrt(std::max(0.0, 1.0 - share * share)));
        const double angle = cutoff * centred;
        taps[i] = window * (std::abs(angle) < 1e-12 ? 1.0 : std::sin(angle) / angle);
        sum += taps[i];
    }
    for (double& tap : taps)
        tap /= sum;
    return taps;
}

} // namespace

Complex Band::response(Complex q) const {
    const Complex back = std::exp(-q);
    Complex sum = 0.0;
    for (std::size_t i = taps.size(); i-- > 0;)
        sum = sum * back + taps[i];
    return sum;
}

Band bandAround(std::span<const double> sound, double centre, double gap, double stopbandDb,
                std::size_t mostSamples) {
    Band band;
    band.centre = centre;
    band.taps = lowPass(0.5 * gap, 0.5 * gap, stopbandDb, sound.size() / 2);
    band.step = std::max<std::size_t>(1, static_cast<std::size_t>(pi / gap)); // twice the gap as sample rate
    band.first = band.taps.size() - 1;

    const auto length = static_cast<Eigen::Index>(band.taps.size());
    Eigen::VectorXd real(length), imaginary(length);
    for (Eigen::Index k = 0; k < length; ++k) {
        // Against the sound in its own order: tap k meets sample n − k.
        const double angle = centre * static_cast<double>(k), tap = band.taps[static_cast<std::size_t>(k)];
        real[length - 1 - k] = tap * std::cos(angle);
        imaginary[length - 1 - k] = tap * std::sin(angle);
    }
    const std::size_t count = std::min(mostSamples, (sound.size() - band.taps.size()) / band.step + 1);
    band.samples.resize(count);
    for (std::size_t m = 0; m < count; ++m) {
        const std::size_t last = band.first + m * band.step;
        const Eigen::Map<const Eigen::VectorXd> piece(sound.data() + (last - band.first), length);
        band.samples[m] =
            Complex(piece.dot(real), piece.dot(imaginary)) *
            std::polar(1.0, -std::remainder(centre * static_cast<double>(last), 2.0 * pi));
    }
    return band;
}

} // namespace hitchpin::analysis
