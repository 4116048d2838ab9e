// One thread that designs for every instance in the process, at low priority.
#pragma once

#include <condition_variable>
#include <mutex>
#include <thread>
#include <vector>

namespace hitchpin::plugin {

/// Shared by way of juce::SharedResourcePointer: it begins with the first instance that needs it and ends with
/// the last. It looks at each task in turn, some dozens of times a second or at once when woken, so the audio
/// thread never has to signal anything.
class Designer {
public:
    /// What an instance wants done. Called on the designing thread alone, one task at a time.
    class Task {
    public:
        virtual ~Task() = default;
        virtual void work() = 0;
    };

    Designer();
    ~Designer();
    Designer(const Designer&) = delete; // a thread runs on it
    Designer& operator=(const Designer&) = delete;

    void join(Task&);
    /// Returns when `task` is not being worked on and never will be again. The task should give up its work soon.
    void leave(Task&);
    /// Not from the audio thread.
    void wake();

private:
    void run();

    std::mutex lock_;
    std::condition_variable woken_;
    std::condition_variable finished_;
    std::vector<Task*> tasks_;
    Task* atWork_ = nullptr;
    bool wakeAsked_ = false;
    bool ending_ = false;
    std::thread thread_; ///< last: it starts on what stands above
};

} // namespace hitchpin::plugin
