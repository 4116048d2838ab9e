#include "tests/support/AllocationGuard.h"

#include <cerrno>
#include <cstddef>
#include <cstdlib>

namespace {

#if defined(__SANITIZE_ADDRESS__) || defined(__SANITIZE_THREAD__)
constexpr bool interposed = false;
#else
constexpr bool interposed = true;
#endif

// Plain thread-local integers: touching them asks nothing of the heap.
thread_local bool counting = false;
thread_local int allocationCount = 0;
thread_local int freeCount = 0;

} // namespace

namespace hitchpin::support {

AllocationGuard::AllocationGuard() noexcept {
    allocationCount = 0;
    freeCount = 0;
    counting = true;
}
AllocationGuard::~AllocationGuard() { counting = false; }
int AllocationGuard::allocations() const noexcept { return allocationCount; }
int AllocationGuard::frees() const noexcept { return freeCount; }
bool AllocationGuard::works() noexcept { return interposed; }

} // namespace hitchpin::support

#if !defined(__SANITIZE_ADDRESS__) && !defined(__SANITIZE_THREAD__)

// glibc's own entry points, under the names that it keeps for this purpose.
extern "C" {
void* __libc_malloc(std::size_t);
void* __libc_calloc(std::size_t, std::size_t);
void* __libc_realloc(void*, std::size_t);
void* __libc_memalign(std::size_t, std::size_t);
void __libc_free(void*);

void* malloc(std::size_t size) {
    allocationCount += counting;
    return __libc_malloc(size);
}
void* calloc(std::size_t count, std::size_t size) {
    allocationCount += counting;
    return __libc_calloc(count, size);
}
void* realloc(void* block, std::size_t size) {
    allocationCount += counting;
    return __libc_realloc(block, size);
}
void* memalign(std::size_t alignment, std::size_t size) {
    allocationCount += counting;
    return __libc_memalign(alignment, size);
}
void* aligned_alloc(std::size_t alignment, std::size_t size) {
    allocationCount += counting;
    return __libc_memalign(alignment, size);
}
int posix_memalign(void** block, std::size_t alignment, std::size_t size) {
    allocationCount += counting;
    *block = __libc_memalign(alignment, size);
    return *block == nullptr ? ENOMEM : 0;
}
void free(void* block) {
    freeCount += counting && block != nullptr;
    __libc_free(block);
}
}

#endif
