// SPDX-License-Identifier: MIT
// Text of one cell to a number, or to a time: to the nanosecond without a detour over floating point, so that
// 1700000000.123456789 s keeps its last digit.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <string_view>

#include "estimator/session/units.hpp"

namespace holdfast::session {

[[nodiscard]] std::string_view trimmed(std::string_view text);

// A decimal number, "nan" or "inf"; blanks around it and a plus sign are allowed. Empty: not a number.
[[nodiscard]] std::optional<double> parse_number(std::string_view text);

struct TimeCell {
    enum class Status : std::uint8_t { ok, not_a_number, out_of_range };
    Status status = Status::not_a_number;
    std::int64_t time_ns = 0;
};

// `exponent`: power of ten from the text's unit to nanoseconds, 0..9. Rounds to the nearest, halves away from
// zero.
[[nodiscard]] TimeCell parse_time(std::string_view text, int exponent);

// For a time that a channel map scales or shifts: `to_unit` first, in double precision.
[[nodiscard]] TimeCell parse_mapped_time(std::string_view text, const Linear& to_unit, int exponent);

// In seconds, with as few decimals as keep every nanosecond.
[[nodiscard]] std::string time_text_s(std::int64_t time_ns);

}  // namespace holdfast::session
