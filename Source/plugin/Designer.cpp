#include "Source/plugin/Designer.h"

#include <algorithm>
#include <chrono>

#if defined(__linux__)
#include <sys/resource.h>
#include <sys/syscall.h>
#include <unistd.h>
#endif

namespace hitchpin::plugin {

namespace {

constexpr auto betweenLooks = std::chrono::milliseconds(10);

/// Designs give way to sound and window. On Linux a nice value belongs to a thread; elsewhere the thread is left
/// as it is.
void lowerOwnPriority() {
#if defined(__linux__)
    constexpr int nice = 10;
    setpriority(PRIO_PROCESS, static_cast<id_t>(syscall(SYS_gettid)), nice);
#endif
}

} // namespace

Designer::Designer() : thread_([this] { run(); }) {}

Designer::~Designer() {
    {
        const std::lock_guard guard(lock_);
        ending_ = true;
    }
    woken_.notify_all();
    thread_.join(); // every task has left, so nothing long is in hand
}

void Designer::join(Task& task) {
    {
        const std::lock_guard guard(lock_);
        tasks_.push_back(&task);
    }
    wake();
}

void Designer::leave(Task& task) {
    std::unique_lock guard(lock_);
    std::erase(tasks_, &task);
    finished_.wait(guard, [&] { return atWork_ != &task; });
}

void Designer::wake() {
    {
        const std::lock_guard guard(lock_);
        wakeAsked_ = true;
    }
    woken_.notify_all();
}

void Designer::run() {
    lowerOwnPriority();
    std::vector<Task*> round;
    std::unique_lock guard(lock_);
    while (!ending_) {
        wakeAsked_ = false;
        round = tasks_;
        for (Task* task : round) {
            if (std::find(tasks_.begin(), tasks_.end(), task) == tasks_.end())
                continue; // it left meanwhile
            atWork_ = task;
            guard.unlock();
            task->work();
            guard.lock();
            atWork_ = nullptr;
            finished_.notify_all();
        }
        woken_.wait_for(guard, betweenLooks, [this] { return wakeAsked_ || ending_; });
    }
}

} // namespace hitchpin::plugin
