// SPDX-License-Identifier: MIT
// How values are written: numbers, rows of a CSV file.
#pragma once

#include <concepts>
#include <cstdint>
#include <string>
#include <string_view>

namespace holdfast::outputs {

// Source time as seconds: divided, so that 7 500 000 000 ns is 7.5 to the last bit.
[[nodiscard]] constexpr double seconds(std::int64_t time_ns) {
    return static_cast<double>(time_ns) / 1e9;
}

// Nine significant digits, no trailing zeros, "." whatever the locale; empty where the value is not finite.
[[nodiscard]] std::string number(double value);

// For a person to read: a fixed number of decimals; "unknown" where the value is not finite.
[[nodiscard]] std::string fixed(double value, int decimals);

// One row of a CSV file (RFC 4180): cells in the order in which they are added. An unknown value is an empty
// cell, never a 0.
class Row {
  public:
    Row& add(double value) { return cell(number(value)); }
    Row& add(std::integral auto value) { return cell(std::to_string(value)); }
    Row& add(std::string_view word) { return cell(word); }
    Row& add_if(bool known, double value) { return known ? add(value) : empty(); }
    Row& empty() { return cell({}); }

    // The row with its line end.
    [[nodiscard]] std::string line() const { return text_ + "\n"; }

  private:
    Row& cell(std::string_view content);

    std::string text_;
    bool first_ = true;
};

}  // namespace holdfast::outputs
