// Progress on the terminal, and the interrupt key as a way out that leaves nothing behind.
#pragma once

#include <string>

namespace hitchpin::console {

/// One at a time. Shows a line on stderr while that is a terminal; an interrupt (SIGINT, SIGTERM) during its life
/// asks the work to stop instead of ending the program.
class LongWork {
public:
    explicit LongWork(std::string what);
    ~LongWork();
    LongWork(const LongWork&) = delete;
    LongWork& operator=(const LongWork&) = delete;

    /// The share done, 0…1. False when the work should stop.
    bool goOn(double share);
    static bool interrupted() noexcept;

private:
    std::string what_;
    bool terminal_;
    int shown_ = -1;
};

} // namespace hitchpin::console
