#include "dsp/engine/Rail.h"

#include <algorithm>
#include <cmath>

namespace hitchpin::engine {

RailLoop::RailLoop(const design::LoopDesign& design, bool freeNut)
    : delay(std::max(1, design.delay)),
      // Partial 1 goes round in one period, or in half a one where one end is free.
      roundTrip((design.turn < 0.0 ? 0.5 : 1.0) * design.sampleRate / design.firstPartialHz),
      factor(freeNut ? design.gain : -design.gain), thiranSin(design.thiran),
      thiranCos(std::sqrt((1.0 - design.thiran) * (1.0 + design.thiran))) {
    for (const auto& shelf : design.shelves) {
        if (shelf.order == 1)
            shelves.push_back(design::shelfForm(shelf));
        else
            steepShelves.push_back(design::steepShelfForm(shelf));
    }
    for (const auto& section : design.sections)
        sections.push_back(design::ladderForm(section));
}

Rail::Rail(const std::vector<RailLoop>& loops) : loop_(&loops.front()) {
    std::size_t longest = 0, shelves = 0, steepShelves = 0, sections = 0;
    for (const auto& loop : loops) {
        // A whole round trip stays in the line, so that the motion can be looked at.
        longest = std::max({longest, static_cast<std::size_t>(loop.delay),
                            static_cast<std::size_t>(std::ceil(loop.roundTrip))});
        shelves = std::max(shelves, loop.shelves.size());
        steepShelves = std::max(steepShelves, loop.steepShelves.size());
        sections = std::max(sections, loop.sections.size());
    }
    std::size_t size = 1;
    while (size < longest + longestChunk + 4)
        size *= 2;
    line_.assign(size, 0.0);
    mask_ = size - 1;
    shelfStates_.assign(shelves, 0.0);
    steepShelfStates_.assign(steepShelves, {});
    sectionStates_.assign(sections, {});
}

void Rail::speak(const RailLoop& loop) noexcept {
    loop_ = &loop;
    hold.jump(1.0);
    clear();
}

void Rail::clear() noexcept {
    std::fill(line_.begin(), line_.end(), 0.0);
    std::fill(shelfStates_.begin(), shelfStates_.end(), 0.0);
    std::fill(sectionStates_.begin(), sectionStates_.end(), TwoStates{});
    std::fill(steepShelfStates_.begin(), steepShelfStates_.end(), TwoStates{});
    thiranState_ = 0.0;
    next_ = 0;
    running_ = false;
    presence.jump(1.0);
    releases.clear();
}

void Rail::arrive(double* wave, int count, std::int64_t now) noexcept {
    const RailLoop& loop = *loop_;
    std::size_t read = next_ - static_cast<std::size_t>(loop.delay);
    for (int i = 0; i < count; ++i)
        wave[i] = line_[read++ & mask_];

    // Filter by filter over the chunk: coefficients and state stay in registers.
    for (std::size_t k = 0; k < loop.shelves.size(); ++k) {
        const auto [a, b, c, d] = loop.shelves[k];
        double m = shelfStates_[k];
        for (int i = 0; i < count; ++i) {
            const double x = wave[i];
            wave[i] = d * x + c * m;
            m = b * x + a * m;
        }
        shelfStates_[k] = m;
    }
    for (std::size_t k = 0; k < loop.steepShelves.size(); ++k) {
        const auto [a11, a12, a21, a22, b1, b2, c1, c2, d] = loop.steepShelves[k];
        auto [m1, m2] = steepShelfStates_[k];
        for (int i = 0; i < count; ++i) {
            const double x = wave[i];
            wave[i] = d * x + c1 * m1 + c2 * m2;
            const double next = b1 * x + a11 * m1 + a12 * m2;
            m2 = b2 * x + a21 * m1 + a22 * m2;
            m1 = next;
        }
        steepShelfStates_[k] = {m1, m2};
    }
    for (std::size_t k = 0; k < loop.sections.size(); ++k) {
        const auto [k1, q1, k2, q2] = loop.sections[k];
        auto [m1, m2] = sectionStates_[k];
        for (int i = 0; i < count; ++i) {
            const double x = wave[i];
            const double w = q2 * x - k2 * m2;
            wave[i] = k2 * x + q2 * m2;
            m2 = k1 * w + q1 * m1;
            m1 = q1 * w - k1 * m1;
        }
        sectionStates_[k] = {m1, m2};
    }
    {
        const double sine = loop.thiranSin, cosine = loop.thiranCos;
        double m = thiranState_;
        for (int i = 0; i < count; ++i) {
            const double x = wave[i];
            wave[i] = loop.factor * (sine * x + cosine * m);
            m = cosine * x - sine * m;
        }
        thiranState_ = m;
    }

    if (!hold.isOne())
        for (int i = 0; i < count; ++i)
            wave[i] *= hold.next();
    if (releases.pending())
        releases.addTo(wave, count, now);
    if (!presence.isOne())
        for (int i = 0; i < count; ++i)
            wave[i] *= presence.next();
}

void Rail::leave(const double* wave, int count) noexcept {
    for (int i = 0; i < count; ++i)
        line_[next_++ & mask_] = wave[i];
}

double Rail::sumOfSquares() const noexcept {
    double sum = thiranState_ * thiranState_;
    for (int age = 1; age <= loop_->delay; ++age) {
        const double wave = line_[(next_ - static_cast<std::size_t>(age)) & mask_];
        sum += wave * wave;
    }
    for (const auto* states : {&sectionStates_, &steepShelfStates_})
        for (const auto& [m1, m2] : *states)
            sum += m1 * m1 + m2 * m2;
    for (const double m : shelfStates_)
        sum += m * m;
    return sum;
}

void Rail::flush() noexcept {
    const auto flushed = [](double state) { return std::abs(state) < 1e-60 ? 0.0 : state; };
    thiranState_ = flushed(thiranState_);
    for (auto* states : {&sectionStates_, &steepShelfStates_}) {
        for (auto& [m1, m2] : *states) {
            m1 = flushed(m1);
            m2 = flushed(m2);
        }
    }
    for (double& state : shelfStates_)
        state = flushed(state);
}

double Rail::left(double age) const noexcept {
    const double first = std::max(0.0, std::floor(age) - 1.0), t = age - first;
    const auto sample = [&](int i) {
        return line_[(next_ - 1 - static_cast<std::size_t>(first) - static_cast<std::size_t>(i)) & mask_];
    };
    return sample(0) * (1.0 - t) * (2.0 - t) * (3.0 - t) / 6.0 + sample(1) * t * (2.0 - t) * (3.0 - t) / 2.0 -
           sample(2) * t * (1.0 - t) * (3.0 - t) / 2.0 + sample(3) * t * (1.0 - t) * (2.0 - t) / 6.0;
}

} // namespace hitchpin::engine
