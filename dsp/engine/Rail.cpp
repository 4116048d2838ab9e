#include "dsp/engine/Rail.h"

#include <algorithm>
#include <cmath>

namespace hitchpin::engine {

RailLoop::RailLoop(const design::SpeakingString& from, const string::Ends& ends)
    : delay(std::max(1, from.loop.delay)), period(from.loop.sampleRate / from.loop.firstPartialHz),
      freeNut(ends.nut == string::End::free),
      chain(freeNut ? from.loop.gain : -from.loop.gain, from.loop.thiran, from.loop.shelves, from.loop.sections),
      plucked(from.plucked) {
    // Partial 1 goes round in one period, or in half a one where one end is free.
    roundTrip = (from.loop.turn < 0.0 ? 0.5 : 1.0) * period;
    if (from.listening)
        listening.emplace(*from.listening);
}

Rail::Rail(const std::vector<RailLoop>& loops) : loop_(&loops.front()) {
    std::size_t longest = 0, waiting = 0;
    bool listened = false;
    for (const auto& loop : loops) {
        // A whole round trip stays in the line, so that the motion can be looked at.
        longest = std::max({longest, static_cast<std::size_t>(loop.delay),
                            static_cast<std::size_t>(std::ceil(loop.roundTrip))});
        chain_.makeRoomFor(loop.chain);
        releases.makeRoomFor(loop.plucked);
        if (loop.listening) {
            listened = true;
            listeningSide_.makeRoomFor(loop.listening->side);
            listeningLevel_.makeRoomFor(loop.listening->level);
            waiting = std::max(waiting, static_cast<std::size_t>(std::max(0, -loop.listening->delay)));
            longest = std::max(longest, static_cast<std::size_t>(std::max(0, loop.listening->delay)));
        }
    }
    if (listened)
        arrived_.assign(waiting + longestChunk, 0.0);
    std::size_t size = 1;
    while (size < longest + longestChunk + 4)
        size *= 2;
    line_.assign(size, 0.0);
    mask_ = size - 1;
}

void Rail::speak(const RailLoop& loop) noexcept {
    loop_ = &loop;
    hold.jump(1.0);
    clear();
}

void Rail::clear() noexcept {
    std::fill(line_.begin(), line_.end(), 0.0);
    std::fill(arrived_.begin(), arrived_.end(), 0.0);
    chain_.clear();
    listeningSide_.clear();
    listeningLevel_.clear();
    next_ = 0;
    running_ = false;
    presence.jump(1.0);
    releases.clear();
    before_ = nullptr;
}

bool Rail::canTakeOver(const Rail& before) const noexcept {
    return line_.size() >= static_cast<std::size_t>(before.loop_->delay + longestChunk + 4);
}

void Rail::takeOver(Rail& before, const RailLoop& loop, int fade) noexcept {
    speak(loop);
    if (!before.running_)
        return;
    running_ = true;
    presence = before.presence;
    for (std::size_t age = 1; age <= std::min(line_.size(), before.line_.size()); ++age)
        line_[(next_ - age) & mask_] = before.line_[(before.next_ - age) & before.mask_];
    // A rail that is itself still taking over goes on as what it becomes: its successor waits for that, see Engine.
    before_ = &before;
    runningIn_ = static_cast<int>(2.0 * std::max(loop.roundTrip, before.loop_->roundTrip));
    fade_ = fade;
    own_.jump(0.0);
}

void Rail::readLine(double* wave, int count, int delay) const noexcept {
    std::size_t read = next_ - static_cast<std::size_t>(delay);
    for (int i = 0; i < count; ++i)
        wave[i] = line_[read++ & mask_];
}

void Rail::arrive(double* wave, int count, std::int64_t now) noexcept {
    const RailLoop& loop = *loop_;
    readLine(wave, count, loop.delay);
    chain_.run(loop.chain, wave, count);
    if (before_ != nullptr) {
        std::array<double, longestChunk> old;
        readLine(old.data(), count, before_->loop_->delay);
        before_->chain_.run(before_->loop_->chain, old.data(), count);
        for (int i = 0; i < count; ++i) {
            if (runningIn_ > 0 && --runningIn_ == 0)
                own_.move(1.0, fade_);
            const double own = own_.next();
            wave[i] = own * wave[i] + (1.0 - own) * old[static_cast<std::size_t>(i)];
        }
    }
    if (!hold.isOne())
        for (int i = 0; i < count; ++i)
            wave[i] *= hold.next();
    if (releases.pending())
        releases.addTo(wave, count, now, loop.plucked);
    if (before_ != nullptr && before_->releases.pending())
        before_->releases.addTo(wave, count, now, before_->loop_->plucked);
    if (!presence.isOne())
        for (int i = 0; i < count; ++i)
            wave[i] *= presence.next();
    if (loop.listening)
        std::copy_n(wave, count, arrived_.end() - longestChunk);
}

void Rail::leave(const double* wave, int count) noexcept {
    for (int i = 0; i < count; ++i)
        line_[next_++ & mask_] = wave[i];
    if (loop_->listening)
        listen(*loop_->listening, count);
}

/// Where the bridge is the nearer end, a wave passes the place on its way to it and, having left, once more: in + S·out.
/// Where the nut is, the wave that left the bridge passes there and comes back turned over: out ± S·out. All of it half
/// a round trip of that side late.
void Rail::listen(const Place& place, int count) noexcept {
    const double returns = place.end.isBridge || loop_->freeNut ? 1.0 : -1.0;
    const auto leftBefore = [&](double* wave, int samples) {
        std::size_t read = next_ - static_cast<std::size_t>(count + samples);
        for (int i = 0; i < count; ++i)
            wave[i] = line_[read++ & mask_];
    };
    std::array<double, longestChunk> returned;
    leftBefore(returned.data(), std::max(0, place.delay));
    listeningSide_.run(place.side, returned.data(), count);

    const int waits = std::max(0, -place.delay);
    if (place.end.isBridge)
        std::copy_n(arrived_.end() - longestChunk - waits, count, heard_.begin());
    else
        leftBefore(heard_.data(), waits);
    std::move(arrived_.begin() + count, arrived_.end() - longestChunk + count, arrived_.begin());

    for (int i = 0; i < count; ++i)
        heard_[static_cast<std::size_t>(i)] += returns * returned[static_cast<std::size_t>(i)];
    listeningLevel_.run(place.level, heard_.data(), count);
}

double Rail::sumOfSquares() const noexcept {
    double sum = chain_.sumOfSquares();
    for (int age = 1; age <= loop_->delay; ++age) {
        const double wave = line_[(next_ - static_cast<std::size_t>(age)) & mask_];
        sum += wave * wave;
    }
    return sum;
}

void Rail::flush() noexcept {
    chain_.flush();
    listeningSide_.flush();
    listeningLevel_.flush();
    releases.flush(loop_->plucked);
    if (before_ == nullptr)
        return;
    before_->chain_.flush();
    before_->releases.flush(before_->loop_->plucked);
    if (own_.isOne() && !before_->releases.pending())
        before_ = nullptr;
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
