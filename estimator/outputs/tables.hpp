// SPDX-License-Identifier: MIT
// Rows of closures.csv and estimates.csv. Columns, units and order are described in README.md, "Outputs"; a
// cell is empty where the data could not tell.
#pragma once

#include <cstdint>
#include <string>
#include <string_view>
#include <vector>

#include "estimator/core/results.hpp"

namespace holdfast::outputs {

// One named value of a row; the text is empty where it is not known.
struct Cell {
    enum class Kind : std::uint8_t { number, word };

    std::string_view name;
    std::string text;
    Kind kind = Kind::number;
};

// chord: reference length of convective time (car file, flap.chord).
[[nodiscard]] std::vector<Cell> closure_cells(const core::Closure& closure, double chord_m);
[[nodiscard]] std::string closures_header();
[[nodiscard]] std::string closure_row(const core::Closure& closure, double chord_m);

[[nodiscard]] std::string_view estimates_header();
[[nodiscard]] std::string estimate_row(const core::Estimate& estimate);

}  // namespace holdfast::outputs
