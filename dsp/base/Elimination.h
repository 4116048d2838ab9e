// Small systems of linear equations, without a heap: for the engine and for equations that are solved very often.
#pragma once

#include <algorithm>
#include <cmath>
#include <complex>
#include <cstddef>

namespace hitchpin {

/// A·X = B by Gauss's elimination with partial pivoting (Golub and Van Loan, Matrix Computations; from memory). A is n × n
/// and B n × m, row by row; A is used up, B becomes X. A has to have an inverse. Real-time safe.
template <class Number>
void eliminate(Number* a, Number* b, std::size_t n, std::size_t m) noexcept {
    for (std::size_t c = 0; c < n; ++c) {
        std::size_t pivot = c;
        for (std::size_t i = c + 1; i < n; ++i)
            if (std::abs(a[i * n + c]) > std::abs(a[pivot * n + c]))
                pivot = i;
        if (pivot != c) {
            std::swap_ranges(a + c * n, a + (c + 1) * n, a + pivot * n);
            std::swap_ranges(b + c * m, b + (c + 1) * m, b + pivot * m);
        }
        const Number scale = 1.0 / a[c * n + c];
        for (std::size_t j = c; j < n; ++j)
            a[c * n + j] *= scale;
        for (std::size_t j = 0; j < m; ++j)
            b[c * m + j] *= scale;
        for (std::size_t i = 0; i < n; ++i) {
            const Number times = a[i * n + c];
            if (i == c || times == 0.0)
                continue;
            for (std::size_t j = c; j < n; ++j)
                a[i * n + j] -= times * a[c * n + j];
            for (std::size_t j = 0; j < m; ++j)
                b[i * m + j] -= times * b[c * m + j];
        }
    }
}

} // namespace hitchpin
