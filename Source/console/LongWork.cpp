#include "Source/console/LongWork.h"

#include <csignal>
#include <cstdio>
#include <unistd.h>

namespace hitchpin::console {

namespace {

volatile std::sig_atomic_t stopAsked = 0;
void askToStop(int) { stopAsked = 1; }

} // namespace

LongWork::LongWork(std::string what) : what_(std::move(what)), terminal_(::isatty(STDERR_FILENO) != 0) {
    std::signal(SIGINT, askToStop);
    std::signal(SIGTERM, askToStop);
}

LongWork::~LongWork() {
    if (terminal_ && shown_ >= 0)
        std::fprintf(stderr, "\r\033[K");
    std::signal(SIGINT, SIG_DFL);
    std::signal(SIGTERM, SIG_DFL);
}

bool LongWork::goOn(double share) {
    const int percent = static_cast<int>(100.0 * share);
    if (terminal_ && percent != shown_) {
        std::fprintf(stderr, "\r\033[K%s %d %%", what_.c_str(), percent);
        std::fflush(stderr);
        shown_ = percent;
    }
    return stopAsked == 0;
}

bool LongWork::interrupted() noexcept { return stopAsked != 0; }

} // namespace hitchpin::console
