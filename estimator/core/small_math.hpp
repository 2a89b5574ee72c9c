// SPDX-License-Identifier: MIT
// Words that the core's files share.
#pragma once

#include <cstdint>

#include "proto/vocabulary/channel.hpp"

namespace holdfast::core {

inline constexpr double kGravity = 9.80665;  // m/s^2, standard value (ISO 80000-3)

[[nodiscard]] constexpr double square(double v) {
    return v * v;
}

// Whether a set of channels (bits as in Frame::present) holds this one.
[[nodiscard]] constexpr bool has(std::uint64_t channels, Channel c) {
    return ((channels >> index(c)) & 1U) != 0;
}

}  // namespace holdfast::core
