// Passes objects between the thread that makes them and the audio thread, without a lock on either side and
// without the audio thread ever freeing one.
#pragma once

#include <array>
#include <atomic>
#include <cstddef>
#include <memory>

namespace hitchpin::plugin {

/// One way: a single place in which the latest object waits; an untaken one is replaced, so that the latest wins.
/// Back: a few places for what the audio thread no longer uses. Where these are full the audio thread keeps what
/// it has and takes nothing new: that is the back-pressure, and it bounds what is alive at once.
///
/// offer() from one maker; take() and giveBack() from the audio thread; collect() from any other thread.
/// All but collect(), offer() and the destructor are wait-free and touch no heap.
template <class T>
class Handover {
public:
    Handover() = default;
    Handover(const Handover&) = delete; // the places are shared by address
    Handover& operator=(const Handover&) = delete;

    /// Neither side may be at work any more.
    ~Handover() {
        delete waiting_.load(std::memory_order_acquire);
        collect();
    }

    void offer(std::unique_ptr<T> made) { delete waiting_.exchange(made.release(), std::memory_order_acq_rel); }

    /// nullptr where nothing new waits. The taker owns it until it gives it back.
    T* take() noexcept {
        // A plain look first: an exchange at each block would pull the line from the maker's core for nothing.
        if (waiting_.load(std::memory_order_relaxed) == nullptr)
            return nullptr;
        return waiting_.exchange(nullptr, std::memory_order_acq_rel);
    }

    /// False where every place is full: keep it and try again later.
    bool giveBack(T* used) noexcept {
        for (auto& place : used_)
            // Only the audio thread fills a place, so one that is seen empty stays so until it is filled here.
            if (place.load(std::memory_order_acquire) == nullptr) {
                place.store(used, std::memory_order_release);
                return true;
            }
        return false;
    }

    /// Frees what came back. Returns how many.
    std::size_t collect() {
        std::size_t count = 0;
        for (auto& place : used_)
            if (T* used = place.exchange(nullptr, std::memory_order_acq_rel)) {
                delete used;
                ++count;
            }
        return count;
    }

private:
    std::atomic<T*> waiting_{nullptr};
    std::array<std::atomic<T*>, 4> used_{};
    static_assert(std::atomic<T*>::is_always_lock_free);
};

} // namespace hitchpin::plugin
