#include "dsp/engine/Bridge.h"

#include "dsp/base/Elimination.h"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace hitchpin::engine {

Bridge::Bridge(const design::BoardDesign& design, double sampleRate)
    : points_(static_cast<int>(design.points.size())), heardPerVelocity_(design.heard) {
    if (design.kind == board::BridgeKind::rigid) {
        heardPerVelocity_ = 0.0;
        return;
    }
    const auto points = static_cast<std::size_t>(points_);
    const bool movesAcross = board::movesAcross(design.modes);
    first_[across] = movesAcross ? 0 : -1;
    first_[into] = movesAcross ? points_ : 0;
    size_ = movesAcross ? 2 * points : points;

    for (const board::Mode& mode : design.modes) {
        modes_.push_back({design::modeFilter(mode, sampleRate)});
        for (const Direction direction : {across, into}) {
            const double part = direction == across ? std::cos(mode.angle) : std::sin(mode.angle);
            for (std::size_t p = 0; p < points && first_[direction] >= 0; ++p)
                motion_.push_back(part * mode.shape[p]);
        }
        sources_.push_back({mode.angle, 0.5 + 0.5 * mode.pan});
    }
    for (const board::Point& point : design.points) {
        resistance_.push_back(point.resistance);
        if (heardByBoard())
            sources_.push_back({0.5 * std::numbers::pi, point.along});
    }

    atOnce_.assign(size_ * size_, 0.0);
    for (std::size_t p = 0; p < points; ++p) {
        const std::size_t k = static_cast<std::size_t>(first_[into]) + p;
        atOnce_[k * size_ + k] = 1.0 / resistance_[p];
    }
    for (std::size_t m = 0; m < modes_.size(); ++m)
        for (std::size_t i = 0; i < size_; ++i)
            for (std::size_t j = 0; j < size_; ++j)
                atOnce_[i * size_ + j] += modes_[m].filter.g * motion_[m * size_ + i] * motion_[m * size_ + j];
    load_.assign(size_ * size_, -1.0); // none: the first is solved
    newLoad_ = byPull_ = byState_ = std::vector<double>(size_ * size_, 0.0);
    work_.assign(size_ * size_, 0.0);
    drive_.assign(size_ * longestChunk, 0.0);
    velocity_ = drive_;
    heard_.assign(sources_.size() * longestChunk, 0.0);
    sample_.assign(3 * size_, 0.0);
}

void Bridge::clear() noexcept {
    for (ModeState& mode : modes_)
        mode.u = mode.e = 0.0;
    ringing_ = false;
    fadeLeft_ = 0;
    peak_ = 0.0;
}

void Bridge::takeOver(const Bridge& before) noexcept {
    clear();
    peak_ = before.peak_;
    if (modes_.size() != before.modes_.size())
        return;
    for (std::size_t m = 0; m < modes_.size(); ++m) {
        modes_[m].u = before.modes_[m].u;
        modes_[m].e = before.modes_[m].e;
    }
    ringing_ = before.ringing_;
    fadeLeft_ = before.fadeLeft_;
    fadeStep_ = before.fadeStep_;
}

void Bridge::fade(int samples) noexcept {
    if (!ringing_)
        return;
    fadeLeft_ = std::max(1, samples);
    fadeStep_ = std::exp(-14.0 / fadeLeft_); // to −120 dB, then nothing
}

double Bridge::energy() const noexcept {
    double sum = 0.0;
    for (const ModeState& mode : modes_)
        sum += 0.5 * mode.filter.mass * (mode.u * mode.u + mode.e * mode.e);
    return sum;
}

void Bridge::rest(double leastEnergy) noexcept {
    if (ringing_ && energy() < leastEnergy)
        clear();
}

void Bridge::flush() noexcept {
    for (ModeState& mode : modes_) {
        mode.u = std::abs(mode.u) < 1e-60 ? 0.0 : mode.u;
        mode.e = std::abs(mode.e) < 1e-60 ? 0.0 : mode.e;
    }
}

void Bridge::startLoad() noexcept { std::fill(newLoad_.begin(), newLoad_.end(), 0.0); }

void Bridge::addLoad(Direction direction, const board::Sharing& place, double impedance) noexcept {
    if (first_[direction] < 0)
        return;
    const auto k = static_cast<std::size_t>(first_[direction] + place.first);
    newLoad_[k * size_ + k] += place.ofFirst * place.ofFirst * impedance;
    if (place.ofSecond != 0.0) {
        newLoad_[k * size_ + k + 1] += place.ofFirst * place.ofSecond * impedance;
        newLoad_[(k + 1) * size_ + k] += place.ofFirst * place.ofSecond * impedance;
        newLoad_[(k + 1) * size_ + k + 1] += place.ofSecond * place.ofSecond * impedance;
    }
}

/// 1 + Y0·Z has eigenvalues of at least 1 only.
void Bridge::endLoad() noexcept {
    if (newLoad_ == load_)
        return;
    load_ = newLoad_; // same size: no allocation
    const std::size_t n = size_;
    for (std::size_t i = 0; i < n; ++i)
        for (std::size_t j = 0; j < n; ++j) {
            double sum = i == j ? 1.0 : 0.0;
            byState_[i * n + j] = sum;
            for (std::size_t k = 0; k < n; ++k)
                sum += atOnce_[i * n + k] * load_[k * n + j];
            work_[i * n + j] = sum;
        }
    eliminate(work_.data(), byState_.data(), n, n);
    for (std::size_t i = 0; i < n; ++i)
        for (std::size_t j = 0; j < n; ++j) {
            double sum = 0.0;
            for (std::size_t k = 0; k < n; ++k)
                sum += byState_[i * n + k] * atOnce_[k * n + j];
            byPull_[i * n + j] = sum;
        }
}

void Bridge::clearDrive(int count) noexcept {
    for (std::size_t k = 0; k < size_; ++k)
        std::fill_n(row(drive_, k), count, 0.0);
}

void Bridge::addDrive(Direction direction, const board::Sharing& place, double twiceImpedance, const double* in,
                      int count) noexcept {
    const auto k = static_cast<std::size_t>(first_[direction] + place.first);
    double* first = row(drive_, k);
    const double ofFirst = place.ofFirst * twiceImpedance;
    for (int i = 0; i < count; ++i)
        first[i] += ofFirst * in[i];
    if (place.ofSecond == 0.0)
        return;
    double* second = row(drive_, k + 1);
    const double ofSecond = place.ofSecond * twiceImpedance;
    for (int i = 0; i < count; ++i)
        second[i] += ofSecond * in[i];
}

void Bridge::run(int count) noexcept {
    const std::size_t n = size_;
    double *const pull = sample_.data(), *const state = pull + n, *const v = state + n;
    for (int i = 0; i < count; ++i) {
        for (std::size_t k = 0; k < n; ++k) {
            pull[k] = drive_[k * longestChunk + static_cast<std::size_t>(i)];
            state[k] = 0.0;
        }
        for (std::size_t m = 0; m < modes_.size(); ++m) {
            ModeState& mode = modes_[m];
            mode.own = mode.filter.d * (2.0 * mode.u - mode.filter.kappa * mode.e);
            for (std::size_t k = 0; k < n; ++k)
                state[k] += motion_[m * n + k] * mode.own;
        }
        for (std::size_t k = 0; k < n; ++k) {
            double sum = 0.0;
            for (std::size_t j = 0; j < n; ++j)
                sum += byPull_[k * n + j] * pull[j] + byState_[k * n + j] * state[j];
            v[k] = sum;
            velocity_[k * longestChunk + static_cast<std::size_t>(i)] = sum;
            peak_ = std::max(peak_, std::abs(sum));
        }
        for (std::size_t k = 0; k < n; ++k) { // from here on `pull` is what really pulls
            double held = 0.0;
            for (std::size_t j = 0; j < n; ++j)
                held += load_[k * n + j] * v[j];
            state[k] = pull[k] - held;
        }
        for (std::size_t m = 0; m < modes_.size(); ++m) {
            ModeState& mode = modes_[m];
            double force = 0.0;
            for (std::size_t k = 0; k < n; ++k)
                force += motion_[m * n + k] * state[k];
            const double mean = mode.own + mode.filter.g * force;
            mode.u = 2.0 * mean - mode.u;
            mode.e += mode.filter.kappa * mean;
            if (heardByBoard())
                heard_[m * longestChunk + static_cast<std::size_t>(i)] = heardPerVelocity_ * mean;
        }
        if (heardByBoard())
            for (std::size_t p = 0; p < static_cast<std::size_t>(points_); ++p)
                heard_[(modes_.size() + p) * longestChunk + static_cast<std::size_t>(i)] =
                    heardPerVelocity_ / resistance_[p] * state[static_cast<std::size_t>(first_[into]) + p];
        if (fadeLeft_ > 0) {
            --fadeLeft_;
            for (ModeState& mode : modes_) {
                mode.u = fadeLeft_ > 0 ? fadeStep_ * mode.u : 0.0;
                mode.e = fadeLeft_ > 0 ? fadeStep_ * mode.e : 0.0;
            }
        }
    }
    ringing_ = !modes_.empty();
}

void Bridge::velocity(Direction direction, const board::Sharing& place, double* out, int count) const noexcept {
    const auto k = static_cast<std::size_t>(first_[direction] + place.first);
    const double* first = &velocity_[k * longestChunk];
    const double* second = place.ofSecond != 0.0 ? first + longestChunk : first;
    for (int i = 0; i < count; ++i)
        out[i] = place.ofFirst * first[i] + place.ofSecond * second[i];
}

} // namespace hitchpin::engine
