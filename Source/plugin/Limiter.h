// Guards the ears: nothing leaves the app or the plug-in above the threshold.
#pragma once

namespace hitchpin::plugin {

/// A peak limiter without latency. While no sample has gone over the threshold the output is the input to the
/// last bit. A sample over it is brought exactly to it at once (the gain is continuous there, since it starts at
/// 1), both sides by the same gain; the gain is then held and let go, and returns to exactly 1 in a known time.
/// What is not a finite number becomes silence. Real-time safe.
class Limiter {
public:
    static constexpr float threshold = 0.891251f; ///< −1 dB of full scale

    void prepare(double sampleRate) noexcept;
    void reset() noexcept;

    /// `right` may be null. Returns the smallest gain applied, 1 where nothing was done.
    float process(float* left, float* right, int frames) noexcept;

private:
    float gain_ = 1.0f;
    int held_ = 0;
    int holdFrames_ = 1;
    float release_ = 1.0f; ///< the gain grows by this factor a sample
};

} // namespace hitchpin::plugin
