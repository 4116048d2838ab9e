// A factor that moves in a straight line from sample to sample, so that no change of it clicks.
#pragma once

namespace hitchpin::engine {

class Ramp {
public:
    void jump(double value) noexcept {
        value_ = value;
        samplesLeft_ = 0;
    }

    void move(double target, int samples) noexcept {
        if (samples < 1) {
            jump(target);
            return;
        }
        target_ = target;
        step_ = (target - value_) / samples;
        samplesLeft_ = samples;
    }

    double next() noexcept {
        if (samplesLeft_ > 0)
            value_ = --samplesLeft_ == 0 ? target_ : value_ + step_;
        return value_;
    }

    double value() const noexcept { return value_; }
    /// Neither moving nor doing anything.
    bool isOne() const noexcept { return samplesLeft_ == 0 && value_ == 1.0; }
    bool isZero() const noexcept { return samplesLeft_ == 0 && value_ == 0.0; }

private:
    double value_ = 1.0;
    double target_ = 1.0;
    double step_ = 0.0;
    int samplesLeft_ = 0;
};

} // namespace hitchpin::engine
