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

double slope(double t) noexcept { return std::clamp(t, 0.0, 1.0); }

} // namespace

double edge(double t, double width) noexcept {
    // Under a thousandth of a sample the difference below would only lose digits.
    if (width < 1e-3)
        return sharpEdge(t);
    return (edgeIntegral(t + 0.5 * width) - edgeIntegral(t - 0.5 * width)) / width;
}

Release::Release(std::int64_t start, double stepVelocity, const Place& place) noexcept
    : start_(start), step_(stepVelocity), reflected_(place.freeNut ? -stepVelocity : stepVelocity),
      direct_(0.5 * place.ratio * place.roundTrip), returned_(place.roundTrip - direct_),
      roundTrip_(place.roundTrip),
      // A finger no wider than what lies between its middle and the nearer end.
      width_(std::clamp(place.width, 0.0, 2.0 * std::min(direct_, 0.5 * roundTrip_ - direct_))) {
    if (place.freeBridge)
        pull_ = place.freeNut ? 2.0 * step_ : 0.0;
    else
        pull_ = place.freeNut ? step_ : step_ * (1.0 - place.ratio);
    pullBack_ = step_ - reflected_ - pull_;

    const double reach = edgeReach + 0.5 * width_;
    const double lead = std::max(0.0, reach - direct_);
    origin_ = static_cast<double>(start) + lead;
    end_ = start + static_cast<std::int64_t>(std::ceil(lead + std::max(2.0 * roundTrip_, returned_ + reach)));
}

double Release::at(double time) const noexcept {
    if (time >= static_cast<double>(end_))
        return 0.0;
    const double t = time - origin_;
    return pull_ * slope(t / roundTrip_) + pullBack_ * slope(t / roundTrip_ - 1.0) -
           step_ * edge(t - direct_, width_) + reflected_ * edge(t - returned_, width_);
}

void Releases::add(const Release& release, std::int64_t now) noexcept {
    if (count_ == static_cast<int>(releases_.size())) {
        sinking_ += releases_.front().at(static_cast<double>(now));
        std::move(releases_.begin() + 1, releases_.end(), releases_.begin());
        --count_;
    }
    releases_[static_cast<std::size_t>(count_++)] = release;
}

void Releases::addTo(double* wave, int count, std::int64_t now) noexcept {
    for (int r = 0; r < count_; ++r)
        for (int i = 0; i < count; ++i)
            wave[i] += releases_[static_cast<std::size_t>(r)].at(static_cast<double>(now + i));
    if (sinking_ != 0.0) {
        for (int i = 0; i < count; ++i) {
            wave[i] += sinking_;
            sinking_ = std::abs(sinking_) > 1e-30 ? 0.9 * sinking_ : 0.0;
        }
    }
    const auto last = std::remove_if(releases_.begin(), releases_.begin() + count_,
                                     [&](const Release& release) { return release.over(now + count); });
    count_ = static_cast<int>(last - releases_.begin());
}

void Releases::clear() noexcept {
    count_ = 0;
    sinking_ = 0.0;
}

} // namespace hitchpin::engine
