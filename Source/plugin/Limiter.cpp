#include "Source/plugin/Limiter.h"

#include <algorithm>
#include <cmath>

namespace hitchpin::plugin {

namespace {
constexpr double holdSeconds = 0.012;          // half a period of 40 Hz: a low note is not bent within its wave
constexpr double releaseDecibelsPerSecond = 60.0;
} // namespace

void Limiter::prepare(double sampleRate) noexcept {
    holdFrames_ = std::max(1, static_cast<int>(holdSeconds * sampleRate));
    release_ = static_cast<float>(std::pow(10.0, releaseDecibelsPerSecond / (20.0 * sampleRate)));
    reset();
}

void Limiter::reset() noexcept {
    gain_ = 1.0f;
    held_ = 0;
}

float Limiter::process(float* left, float* right, int frames) noexcept {
    float smallest = 1.0f;
    for (int i = 0; i < frames; ++i) {
        if (!std::isfinite(left[i]))
            left[i] = 0.0f;
        if (right != nullptr && !std::isfinite(right[i]))
            right[i] = 0.0f;
        const float peak = std::max(std::abs(left[i]), right != nullptr ? std::abs(right[i]) : 0.0f);
        if (peak * gain_ > threshold) {
            gain_ = threshold / peak;
            held_ = holdFrames_;
        } else if (gain_ < 1.0f) {
            if (held_ > 0)
                --held_;
            else
                gain_ = std::min({1.0f, gain_ * release_, threshold / std::max(peak, threshold)});
        }
        if (gain_ < 1.0f) {
            // Rounding may leave the product a step over the threshold.
            left[i] = std::clamp(left[i] * gain_, -threshold, threshold);
            if (right != nullptr)
                right[i] = std::clamp(right[i] * gain_, -threshold, threshold);
            smallest = std::min(smallest, gain_);
        }
    }
    return smallest;
}

} // namespace hitchpin::plugin
