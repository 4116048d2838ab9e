// Counts what a stretch of code asks of the heap: for code that must ask nothing.
#pragma once

namespace hitchpin::support {

/// While one lives, each malloc, calloc, realloc, aligned allocation and free of this thread is counted, and with
/// them operator new and delete and every library's allocations. Interposes the C functions, since operator new
/// alone would miss containers that call malloc. Guards do not nest. Sanitizers bring their own heap: there
/// `works()` is false and nothing is counted.
class AllocationGuard {
public:
    AllocationGuard() noexcept;
    ~AllocationGuard();
    AllocationGuard(const AllocationGuard&) = delete;
    AllocationGuard& operator=(const AllocationGuard&) = delete;

    int allocations() const noexcept;
    int frees() const noexcept;

    static bool works() noexcept;
};

} // namespace hitchpin::support
