// SPDX-License-Identifier: MIT
#include "estimator/session/cell.hpp"

#include <fast_float/fast_float.h>

#include <array>
#include <cmath>
#include <cstdint>
#include <limits>

namespace holdfast::session {
namespace {

constexpr std::array<std::uint64_t, 10> kPowerOfTen{
    1, 10, 100, 1'000, 10'000, 100'000, 1'000'000, 10'000'000, 100'000'000, 1'000'000'000};
constexpr std::uint64_t kLargest = std::numeric_limits<std::int64_t>::max();

bool is_digit(char c) {
    return c >= '0' && c <= '9';
}

// magnitude = 10 magnitude + digit; false where that leaves the range of a time.
bool append_digit(std::uint64_t& magnitude, char digit) {
    const auto unit = static_cast<std::uint64_t>(digit - '0');
    if (magnitude > (kLargest - unit) / 10) return false;
    magnitude = 10 * magnitude + unit;
    return true;
}

TimeCell from_double(double time_ns) {
    constexpr double kRange = 9.2e18;
    if (!(std::fabs(time_ns) < kRange)) return {TimeCell::Status::out_of_range};
    return {TimeCell::Status::ok, std::llround(time_ns)};
}

}  // namespace

std::string_view trimmed(std::string_view text) {
    constexpr std::string_view kBlank = " \t";
    const std::size_t first = text.find_first_not_of(kBlank);
    if (first == std::string_view::npos) return {};
    return text.substr(first, text.find_last_not_of(kBlank) - first + 1);
}

std::optional<double> parse_number(std::string_view text) {
    const char* first = text.data();
    const char* last = first + text.size();
    while (first != last && (*first == ' ' || *first == '\t')) ++first;
    while (first != last && (last[-1] == ' ' || last[-1] == '\t')) --last;
    if (last - first > 1 && *first == '+' && first[1] != '-') ++first;
    if (first == last) return std::nullopt;
    double value = 0.0;
    const auto result = fast_float::from_chars(first, last, value);
    // A number beyond double's range comes as infinity or zero, which is what it is here.
    const bool is_number = result.ec == std::errc() || result.ec == std::errc::result_out_of_range;
    if (!is_number || result.ptr != last) return std::nullopt;
    return value;
}

TimeCell parse_mapped_time(std::string_view text, const Linear& to_unit, int exponent) {
    const std::optional<double> number = parse_number(text);
    if (!number) return {};
    return from_double(to_unit(*number) *
                       static_cast<double>(kPowerOfTen[static_cast<std::size_t>(exponent)]));
}

TimeCell parse_time(std::string_view text, int exponent) {
    const std::string_view number = trimmed(text);
    const bool negative = number.starts_with('-');
    std::size_t at = negative || number.starts_with('+') ? 1 : 0;
    std::size_t digits = 0;
    std::uint64_t magnitude = 0;
    for (; at < number.size() && is_digit(number[at]); ++at, ++digits) {
        if (!append_digit(magnitude, number[at])) return {TimeCell::Status::out_of_range};
    }
    int decimals = 0;
    bool round_up = false;
    if (at < number.size() && number[at] == '.') {
        for (++at; at < number.size() && is_digit(number[at]); ++at, ++digits) {
            if (decimals < exponent) {
                if (!append_digit(magnitude, number[at])) return {TimeCell::Status::out_of_range};
                ++decimals;
            } else if (decimals == exponent) {
                round_up = number[at] >= '5';
                ++decimals;  // digits further back do not matter
            }
        }
    }
    // "1e-3", "nan" or no number at all: the general reader knows.
    if (at != number.size() || digits == 0) return parse_mapped_time(number, {}, exponent);
    for (; decimals < exponent; ++decimals) {
        if (!append_digit(magnitude, '0')) return {TimeCell::Status::out_of_range};
    }
    if (round_up && magnitude < kLargest) ++magnitude;
    const auto time_ns = static_cast<std::int64_t>(magnitude);
    return {TimeCell::Status::ok, negative ? -time_ns : time_ns};
}

std::string time_text_s(std::int64_t time_ns) {
    const bool negative = time_ns < 0;
    const std::uint64_t magnitude =
        negative ? 0 - static_cast<std::uint64_t>(time_ns) : static_cast<std::uint64_t>(time_ns);
    std::string text = (negative ? "-" : "") + std::to_string(magnitude / kPowerOfTen[9]);
    if (const std::uint64_t fraction = magnitude % kPowerOfTen[9]; fraction > 0) {
        std::string digits = std::to_string(kPowerOfTen[9] + fraction);  // the leading 1 holds the zeros
        digits[0] = '.';
        digits.erase(digits.find_last_not_of('0') + 1);
        text += digits;
    }
    return text;
}

}  // namespace holdfast::session
