// The guard against allocations is itself guarded: a guard that sees nothing would pass everything.
#include "tests/support/AllocationGuard.h"

#include <catch2/catch.hpp>

#include <atomic>
#include <cstdlib>
#include <memory>
#include <string>
#include <thread>
#include <vector>

using hitchpin::support::AllocationGuard;

namespace {

// Kept from the optimiser, which may leave out an allocation that nobody looks at.
void* volatile kept = nullptr;

template <class Work>
std::pair<int, int> counted(Work work) {
    AllocationGuard guard;
    work();
    return {guard.allocations(), guard.frees()};
}

} // namespace

TEST_CASE("The allocation guard sees every way to the heap", "[support]") {
    if (!AllocationGuard::works()) {
        WARN("a sanitizer owns the heap: allocations are not counted in this build");
        return;
    }
    CHECK(counted([] { kept = std::malloc(10); std::free(kept); }) == std::pair(1, 1));
    CHECK(counted([] { kept = std::calloc(2, 10); kept = std::realloc(kept, 1000); std::free(kept); }) == std::pair(2, 1));
    CHECK(counted([] { kept = std::aligned_alloc(64, 128); std::free(kept); }) == std::pair(1, 1));
    CHECK(counted([] { auto* p = new double[100]; kept = p; delete[] p; }) == std::pair(1, 1));
    CHECK(counted([] { std::vector<int> v(100); kept = v.data(); }) == std::pair(1, 1));
    CHECK(counted([] { std::string s(100, 'x'); kept = s.data(); }) == std::pair(1, 1));
    CHECK(counted([] {}) == std::pair(0, 0));
}

TEST_CASE("The allocation guard counts its own thread alone", "[support]") {
    if (!AllocationGuard::works())
        return;
    std::atomic<bool> go{false}, done{false};
    std::thread other([&] {
        while (!go)
            std::this_thread::yield();
        kept = std::malloc(100);
        std::free(kept);
        done = true;
    });
    {
        AllocationGuard guard;
        go = true;
        while (!done)
            std::this_thread::yield();
        CHECK(guard.allocations() == 0);
    }
    other.join();
}
