// How much of the time that a block lasts it takes to make it, and when that is too much.
#pragma once

#include <atomic>

namespace hitchpin::plugin {

/// Measures on the audio thread, read from any. Real-time safe: it reads a clock and does sums.
class LoadWatch {
public:
    /// Above this share strings are put out before the sound breaks up; hosts and drivers need the rest.
    static constexpr double tooMuch = 0.8;
    /// What is put out brings the load down to this.
    static constexpr double comfortable = 0.6;

    void prepare(double sampleRate) noexcept;

    /// Tells how long a block of `frames` took. Returns the share of what sounds that should be put out now, 0 as
    /// a rule; having said so it takes the relief for done and looks again a little later.
    double took(double seconds, int frames) noexcept;

    /// Share of the block's time, smoothed over a twentieth of a second.
    double load() const noexcept { return load_.load(std::memory_order_relaxed); }

private:
    double sampleRate_ = 48000.0;
    double waitSeconds_ = 0.0; ///< until what was put out last is out
    std::atomic<double> load_{0.0};
};

} // namespace hitchpin::plugin
