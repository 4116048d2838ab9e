// A value, or why there is none. For failures that depend on data; misuse by the programmer is an assertion.
#pragma once

#include <cassert>
#include <string>
#include <utility>
#include <variant>

namespace hitchpin {

/// Why something could not be done, in a sentence for the person who gave the data.
struct Failure {
    std::string message;
};

/// Holds a `T` or an `E`. Not for the audio thread: error values may own memory.
template <class T, class E = Failure>
class [[nodiscard]] Result {
public:
    Result(T value) : content_(std::in_place_index<0>, std::move(value)) {}
    Result(E error) : content_(std::in_place_index<1>, std::move(error)) {}

    explicit operator bool() const noexcept { return content_.index() == 0; }

    const T& value() const& noexcept { return *assertHolds<0>(); }
    T& value() & noexcept { return const_cast<T&>(*assertHolds<0>()); }
    T&& value() && noexcept { return std::move(const_cast<T&>(*assertHolds<0>())); }
    const E& error() const noexcept { return *assertHolds<1>(); }

    const T& operator*() const& noexcept { return value(); }
    const T* operator->() const noexcept { return assertHolds<0>(); }

private:
    template <std::size_t I>
    auto assertHolds() const noexcept {
        const auto* held = std::get_if<I>(&content_);
        assert(held != nullptr);
        return held;
    }

    std::variant<T, E> content_;
};

} // namespace hitchpin
