// SPDX-License-Identifier: MIT
// Rows of closures.csv and estimates.csv. Columns, units and order are described in README.md, "Outputs"; a
// cell is empty where the data could not tell.
#pragma once

#include <string>
#include <string_view>

#include "estimator/core/results.hpp"

namespace holdfast::outputs {

[[nodiscard]] std::string_view closures_header();
// chord: reference length of convective time (car file, flap.chord).
[[nodiscard]] std::string closure_row(const core::Closure& closure, double chord_m);

[[nodiscard]] std::string_view estimates_header();
[[nodiscard]] std::string estimate_row(const core::Estimate& estimate);

}  // namespace holdfast::outputs
