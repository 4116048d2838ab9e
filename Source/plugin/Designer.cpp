#include "Source/plugin/Designer.h"

#include <algorithm>

namespace hitchpin::plugin {

namespace {
constexpr int millisecondsBetweenLooks = 10;
}

Designer::Designer() : juce::Thread("Hitchpin designer") { startThread(Priority::low); }

Designer::~Designer() {
    signalThreadShouldExit();
    wake();
    stopThread(-1); // every task has left, so nothing long is in hand
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

void Designer::wake() { notify(); }

void Designer::run() {
    std::vector<Task*> round;
    while (!threadShouldExit()) {
        {
            const std::lock_guard guard(lock_);
            round = tasks_;
        }
        for (Task* task : round) {
            {
                const std::lock_guard guard(lock_);
                if (std::find(tasks_.begin(), tasks_.end(), task) == tasks_.end())
                    continue; // it left meanwhile
                atWork_ = task;
            }
            task->work();
            {
                const std::lock_guard guard(lock_);
                atWork_ = nullptr;
            }
            finished_.notify_all();
        }
        wait(millisecondsBetweenLooks);
    }
}

} // namespace hitchpin::plugin
