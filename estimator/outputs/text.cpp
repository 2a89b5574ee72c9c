// SPDX-License-Identifier: MIT
#include "estimator/outputs/text.hpp"

#include <array>
#include <charconv>
#include <cmath>

namespace holdfast::outputs {

std::string number(double value) {
    if (!std::isfinite(value)) return {};
    if (value == 0.0) return "0";  // also -0
    std::array<char, 32> buffer{};
    const auto end =
        std::to_chars(buffer.data(), buffer.data() + buffer.size(), value, std::chars_format::general, 9);
    return {buffer.data(), end.ptr};
}

std::string fixed(double value, int decimals) {
    if (!std::isfinite(value)) return "unknown";
    std::array<char, 400> buffer{};  // the largest double has 309 digits before its point
    const auto end = std::to_chars(buffer.data(), buffer.data() + buffer.size(), value,
                                   std::chars_format::fixed, decimals);
    return {buffer.data(), end.ptr};
}

Row& Row::cell(std::string_view content) {
    if (!first_) text_ += ',';
    first_ = false;
    text_ += content;
    return *this;
}

}  // namespace holdfast::outputs
