// SPDX-License-Identifier: MIT
// The words that files, wire and terminal use for what the engine says. One home for each word.
#pragma once

#include <cstdint>
#include <string>
#include <string_view>

#include "estimator/core/results.hpp"

namespace holdfast::outputs {

// Bits of Estimate::flags as words joined by "|": not_converged|stale|ground_reference|standard_air|
// drag_by_coasting|slow|flap_open|reattaching|sensor_distrusted; empty where no bit is set.
[[nodiscard]] std::string flag_words(std::uint32_t flags);

[[nodiscard]] std::string_view word(core::Verdict verdict);
[[nodiscard]] std::string_view word(core::AlarmKind kind);
[[nodiscard]] std::string_view word(core::Trust trust);
[[nodiscard]] std::string_view word(core::Fault fault);

// Verdict for a file: empty where no braking followed, for then there is nothing to judge; "unclear" where
// brakes came but the data could not tell.
[[nodiscard]] std::string_view verdict_cell(const core::Closure& closure);

}  // namespace holdfast::outputs
