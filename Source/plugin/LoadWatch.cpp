#include "Source/plugin/LoadWatch.h"

#include <cmath>

namespace hitchpin::plugin {

namespace {
constexpr double smoothingSeconds = 0.05;
constexpr double secondsUntilOut = 0.06;
} // namespace

void LoadWatch::prepare(double sampleRate) noexcept {
    sampleRate_ = sampleRate;
    waitSeconds_ = 0.0;
    load_.store(0.0, std::memory_order_relaxed);
}

double LoadWatch::took(double seconds, int frames) noexcept {
    if (frames <= 0)
        return 0.0;
    const double lasts = frames / sampleRate_;
    const double weight = 1.0 - std::exp(-lasts / smoothingSeconds);
    const double before = load_.load(std::memory_order_relaxed), load = before + weight * (seconds / lasts - before);
    waitSeconds_ = std::fmax(0.0, waitSeconds_ - lasts);
    if (load <= tooMuch || waitSeconds_ > 0.0) {
        load_.store(load, std::memory_order_relaxed);
        return 0.0;
    }
    // Load goes with the count of strings that sound, so much the greater part of the work is theirs.
    waitSeconds_ = secondsUntilOut;
    load_.store(comfortable, std::memory_order_relaxed);
    return 1.0 - comfortable / load;
}

} // namespace hitchpin::plugin
