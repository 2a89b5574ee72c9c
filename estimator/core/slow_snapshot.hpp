// SPDX-License-Identifier: MIT
// The slow states (what the car is, and the wind) at one instant: mean, covariance, and how they were let to
// change since the snapshot before. From these the outing is smoothed backwards,
// estimator/outputs/smoothing.hpp.
#pragma once

#include <array>

#include "estimator/core/chassis_state.hpp"
#include "estimator/core/results.hpp"

namespace holdfast::core {

static_assert(kSlowCount == kChassisCount - kMovingCount);

// Index of a state among the slow ones.
[[nodiscard]] constexpr std::size_t slow(ChassisState state) {
    return state - kMovingCount;
}

struct SlowSnapshot {
    double time_s = 0.0;
    std::array<double, kSlowCount> mean{};
    std::array<double, kSlowCount * kSlowCount> covariance{};  // row by row
    std::array<double, kSlowCount> kept{};                     // since the snapshot before: state times kept,
    std::array<double, kSlowCount> added{};                    // and this variance added
};

}  // namespace holdfast::core
