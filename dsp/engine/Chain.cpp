#include "dsp/engine/Chain.h"

#include <algorithm>
#include <cmath>

namespace hitchpin::engine {

Chain::Chain(double gain, double thiran, const std::vector<design::LossShelf>& losses,
             const std::vector<design::AllpassSection>& allpasses)
    : factor(gain), thiranSin(thiran), thiranCos(std::sqrt((1.0 - thiran) * (1.0 + thiran))) {
    for (const auto& shelf : losses) {
        if (shelf.order == 1)
            shelves.push_back(design::shelfForm(shelf));
        else
            steepShelves.push_back(design::steepShelfForm(shelf));
    }
    for (const auto& section : allpasses)
        sections.push_back(design::ladderForm(section));
}

void ChainState::makeRoomFor(const Chain& chain) {
    shelves_.resize(std::max(shelves_.size(), chain.shelves.size()), 0.0);
    steepShelves_.resize(std::max(steepShelves_.size(), chain.steepShelves.size()));
    sections_.resize(std::max(sections_.size(), chain.sections.size()));
}

/// Filter by filter over the chunk: coefficients and state stay in registers.
void ChainState::run(const Chain& chain, double* wave, int count) noexcept {
    for (std::size_t k = 0; k < chain.shelves.size(); ++k) {
        const auto [a, b, c, d] = chain.shelves[k];
        double m = shelves_[k];
        for (int i = 0; i < count; ++i) {
            const double x = wave[i];
            wave[i] = d * x + c * m;
            m = b * x + a * m;
        }
        shelves_[k] = m;
    }
    for (std::size_t k = 0; k < chain.steepShelves.size(); ++k) {
        const auto [a11, a12, a21, a22, b1, b2, c1, c2, d] = chain.steepShelves[k];
        auto [m1, m2] = steepShelves_[k];
        for (int i = 0; i < count; ++i) {
            const double x = wave[i];
            wave[i] = d * x + c1 * m1 + c2 * m2;
            const double next = b1 * x + a11 * m1 + a12 * m2;
            m2 = b2 * x + a21 * m1 + a22 * m2;
            m1 = next;
        }
        steepShelves_[k] = {m1, m2};
    }
    for (std::size_t k = 0; k < chain.sections.size(); ++k) {
        const auto [k1, q1, k2, q2] = chain.sections[k];
        auto [m1, m2] = sections_[k];
        for (int i = 0; i < count; ++i) {
            const double x = wave[i];
            const double w = q2 * x - k2 * m2;
            wave[i] = k2 * x + q2 * m2;
            m2 = k1 * w + q1 * m1;
            m1 = q1 * w - k1 * m1;
        }
        sections_[k] = {m1, m2};
    }
    const double sine = chain.thiranSin, cosine = chain.thiranCos;
    double m = thiran_;
    for (int i = 0; i < count; ++i) {
        const double x = wave[i];
        wave[i] = chain.factor * (sine * x + cosine * m);
        m = cosine * x - sine * m;
    }
    thiran_ = m;
}

void ChainState::clear() noexcept {
    std::fill(shelves_.begin(), shelves_.end(), 0.0);
    std::fill(steepShelves_.begin(), steepShelves_.end(), TwoStates{});
    std::fill(sections_.begin(), sections_.end(), TwoStates{});
    thiran_ = 0.0;
}

double ChainState::sumOfSquares() const noexcept {
    double sum = thiran_ * thiran_;
    for (const double m : shelves_)
        sum += m * m;
    for (const auto* states : {&steepShelves_, &sections_})
        for (const auto& [m1, m2] : *states)
            sum += m1 * m1 + m2 * m2;
    return sum;
}

void ChainState::flush() noexcept {
    const auto flushed = [](double state) { return std::abs(state) < 1e-60 ? 0.0 : state; };
    thiran_ = flushed(thiran_);
    for (double& state : shelves_)
        state = flushed(state);
    for (auto* states : {&steepShelves_, &sections_})
        for (auto& [m1, m2] : *states) {
            m1 = flushed(m1);
            m2 = flushed(m2);
        }
}

} // namespace hitchpin::engine
