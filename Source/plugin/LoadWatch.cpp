#include "Source/plugin/LoadWatch.h"

#include <cmath>

namespace hitchpin::plugin {

namespace {
constexpr double smoothingSeconds = 0.1;
constexpr double secondsBetweenMeasures = 0.03;
} // namespace

void LoadWatch::prepare(double sampleRate) noexcept {
    sampleRate_ = sampleRate;
    waitSeconds_ = 0.0;
    load_.store(0.0, std::memory_order_relaxed);
}

bool LoadWatch::took(double seconds, int frames) noexcept {
    if (frames <= 0)
        return false;
    const double lasts = frames / sampleRate_;
    const double weight = 1.0 - std::exp(-lasts / smoothingSeconds);
    const double load = load_.load(std::memory_order_relaxed) + weight * (seconds / lasts - load_.load(std::memory_order_relaxed));
    load_.store(load, std::memory_order_relaxed);
    waitSeconds_ = std::fmax(0.0, waitSeconds_ - lasts);
    if (load <= tooMuch || waitSeconds_ > 0.0)
        return false;
    waitSeconds_ = secondsBetweenMeasures;
    return true;
}

} // namespace hitchpin::plugin
