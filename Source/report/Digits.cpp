#include "Source/report/Digits.h"

#include <algorithm>
#include <array>
#include <cmath>
#include <cstdio>
#include <cstdlib>

namespace hitchpin::report {

std::string fixed(double value, int decimals) {
    std::array<char, 340> buffer{};
    std::snprintf(buffer.data(), buffer.size(), "%.*f", decimals, value);
    return buffer.data();
}

std::string threeDigits(double value) {
    if (value == 0.0 || !std::isfinite(value))
        return value == 0.0 ? "0" : "-";
    const int above = static_cast<int>(std::floor(std::log10(std::abs(value))));
    const double unit = std::pow(10.0, above - 2);
    return fixed(std::round(value / unit) * unit, std::max(0, 2 - above));
}

std::string measure(double mm) {
    auto text = fixed(mm, 3);
    if (text.back() == '0')
        text.pop_back();
    return text;
}

std::string small(double value) {
    if (value == 0.0)
        return "0";
    std::array<char, 40> buffer{};
    std::snprintf(buffer.data(), buffer.size(), "%.1e", value);
    // "3.9e-04" → "3.9e-4"
    std::string text = buffer.data();
    const auto exponent = text.find('e');
    return text.substr(0, exponent + 1) + std::to_string(std::atoi(text.c_str() + exponent + 1));
}

} // namespace hitchpin::report
