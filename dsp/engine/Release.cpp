#include "dsp/engine/Release.h"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace hitchpin::engine {
namespace {

constexpr double kernelLength = 2.0 * edgeReach;
/// Fourier coefficients of the kernel: a rectangle up to 6/16 of the rate, smoothed by Hann's (¼, ½, ¼).
constexpr std::array<double, 7> kernelShape{1.0, 1.0, 1.0, 1.0, 1.0, 0.75, 0.25};

/// ∫ kernel: ½ + t/N + Σ a_m·sin(2πmt/N)/(πm).
double sharpEdge(double t) noexcept {
    if (t <= -edgeReach)
        return 0.0;
    if (t >= edgeReach)
        return 1.0;
    const double angle = 2.0 * std::numbers::pi * t / kernelLength, twoCos = 2.0 * std::cos(angle);
    double sum = 0.0, previous = 0.0, sine = std::sin(angle);
    for (std::size_t i = 0; i < kernelShape.size(); ++i) {
        sum += kernelShape[i] * sine / static_cast<double>(i + 1);
        const double next = twoCos * sine - previous;
        previous = sine;
        sine = next;
    }
    return 0.5 + t / kernelLength + sum / std::numbers::pi;
}

/// ∫ sharpEdge, nought before it begins: ½t + t²/2N + N/8 − N/2π²·Σ a_m·(cos(2πmt/N) − (−1)^m)/m².
double edgeIntegral(double t) noexcept {
    if (t <= -edgeReach)
        return 0.0;
    if (t >= edgeReach)
        return t;
    const double cosine = std::cos(2.0 * std::numbers::pi * t / kernelLength);
    double sum = 0.0, previous = 1.0, current = cosine, sign = -1.0;
    for (std::size_t i = 0; i < kernelShape.size(); ++i) {
        const auto m = static_cast<double>(i + 1);
        sum += kernelShape[i] * (current - sign) / (m * m);
        const double next = 2.0 * cosine * current - previous;
        previous = current;
        current = next;
        sign = -sign;
    }
    return 0.5 * t + t * t / (2.0 * kernelLength) + kernelLength / 8.0 -
           kernelLength / (2.0 * std::numbers::pi * std::numbers::pi) * sum;
}

} // namespace

double edge(double t, double width) noexcept {
    const double reach = edgeReach + 0.5 * width;
    if (t <= -reach)
        return 0.0;
    if (t >= reach)
        return 1.0;
    // Under a thousandth of a sample the difference below would only lose digits.
    if (width < 1e-3)
        return sharpEdge(t);
    return (edgeIntegral(t + 0.5 * width) - edgeIntegral(t - 0.5 * width)) / width;
}

/// k is the cubic B-spline over four periods, u = t/period: by truncated powers (1/6)·Σ(−1)^j·C(4,j)·(u−j)₊³, of which
/// symmetry leaves two. Its mean is u = 2 and that of k' is −1, so that ∫u·(k + 2k') = 0 and with it the sum of what is
/// sent.
double letGo(double t, double width, double period) noexcept {
    const double u = t / period;
    if (u >= periodsToFade)
        return 0.0;
    const double step = edge(t, width);
    if (u <= 0.0)
        return step;
    const double v = std::min(u, periodsToFade - u), w = std::max(0.0, v - 1.0);
    const double v3 = v * v * v, w3 = w * w * w;
    const double kernel = (v3 - 4.0 * w3) / 6.0, upTo = (v3 * v - 4.0 * w3 * w) / 24.0;
    return step - (u > 0.5 * periodsToFade ? 1.0 - upTo : upTo) - 2.0 * kernel;
}

Release::Release(std::int64_t start, const From& from, const Place& place) noexcept
    : period_(from.period) {
    const NearerEnd end(from.ratio);
    const double turned = (end.isBridge ? from.freeBridge : from.freeNut) ? 1.0 : -1.0;
    directStep_ = end.isBridge ? -turned * from.step : -from.step;
    returnedStep_ = turned * directStep_;
    // A finger no wider than what lies between its middle and the nearer end.
    width_ = std::clamp(from.width, 0.0, end.share * from.roundTrip);

    const double delay = place.delay + (end.share - place.end.share) * from.roundTrip;
    const double first = static_cast<double>(start) + edgeReach + 0.5 * width_;
    directAt_ = first + std::max(0.0, -delay);
    returnedAt_ = first + std::max(0.0, delay);
    end_ = static_cast<std::int64_t>(std::ceil(std::max(directAt_, returnedAt_) + periodsToFade * period_));
}

double Release::direct(std::int64_t time) const noexcept {
    return directStep_ * letGo(static_cast<double>(time) - directAt_, width_, period_);
}

double Release::returned(std::int64_t time) const noexcept {
    return returnedStep_ * letGo(static_cast<double>(time) - returnedAt_, width_, period_);
}

void Releases::makeRoomFor(const Place& place) {
    side_.makeRoomFor(place.side);
    level_.makeRoomFor(place.level);
}

void Releases::add(const Release& release, std::int64_t now) noexcept {
    if (count_ == static_cast<int>(releases_.size())) {
        sinkingDirect_ += releases_.front().direct(now);
        sinkingReturned_ += releases_.front().returned(now);
        std::move(releases_.begin() + 1, releases_.end(), releases_.begin());
        --count_;
    }
    releases_[static_cast<std::size_t>(count_++)] = release;
    exciting_ = true;
}

void Releases::addTo(double* wave, int count, std::int64_t now, const Place& place) noexcept {
    std::array<double, longestChunk> direct, returned;
    std::fill_n(direct.begin(), count, 0.0);
    std::fill_n(returned.begin(), count, 0.0);
    for (int r = 0; r < count_; ++r)
        for (int i = 0; i < count; ++i) {
            const auto at = static_cast<std::size_t>(i);
            direct[at] += releases_[static_cast<std::size_t>(r)].direct(now + i);
            returned[at] += releases_[static_cast<std::size_t>(r)].returned(now + i);
        }
    const auto sink = [&](double& sinking, auto& sum) {
        for (int i = 0; i < count && sinking != 0.0; ++i) {
            sum[static_cast<std::size_t>(i)] += sinking;
            sinking = std::abs(sinking) > 1e-30 ? 0.9 * sinking : 0.0;
        }
    };
    sink(sinkingDirect_, direct);
    sink(sinkingReturned_, returned);

    side_.run(place.side, returned.data(), count);
    for (int i = 0; i < count; ++i)
        direct[static_cast<std::size_t>(i)] += returned[static_cast<std::size_t>(i)];
    level_.run(place.level, direct.data(), count);
    for (int i = 0; i < count; ++i)
        wave[i] += direct[static_cast<std::size_t>(i)];

    const auto last = std::remove_if(releases_.begin(), releases_.begin() + count_,
                                     [&](const Release& release) { return release.over(now + count); });
    count_ = static_cast<int>(last - releases_.begin());
}

void Releases::flush(const Place& place) noexcept {
    if (!exciting_ || count_ > 0 || sinkingDirect_ != 0.0 || sinkingReturned_ != 0.0)
        return;
    // Far below what the loops of the engine call rest.
    constexpr double deadSumOfSquares = 1e-24; // (m/s)²
    if (side_.sumOfSquares() + level_.sumOfSquares() < deadSumOfSquares)
        clear();
}

void Releases::clear() noexcept {
    count_ = 0;
    sinkingDirect_ = sinkingReturned_ = 0.0;
    exciting_ = false;
    side_.clear();
    level_.clear();
}

} // namespace hitchpin::engine
