// SPDX-License-Identifier: MIT
// One linear model for several filters: the chassis filter's own, step by step, as it is on a simulated
// straight. The transition that the chassis filter used is written down at each step, so that a filter that
// knows nothing of cars can follow it with plain matrices.
#pragma once

#include <array>
#include <cstddef>
#include <string>
#include <vector>

#include "estimator/core/car.hpp"
#include "estimator/core/chassis_filter.hpp"

namespace holdfast::bench {

inline constexpr std::size_t kStates = core::kChassisCount;
using State = std::array<double, kStates>;

struct MeasurementModel {
    State h{};  // y = h^T x + noise
    double noise_variance = 0.0;
};

// x+ = F x + known + noise of covariance Q. F is the identity but for the four rows of heave and pitch:
//   heave+      = heave + dt heave_rate + dt^2/2 heave_accel_by_state^T x
//   heave_rate+ = heave_rate + dt heave_accel_by_state^T x,           pitch likewise.
struct ModelStep {
    core::ChassisInput input;  // what the chassis filter makes all this from
    State heave_accel_by_state{};
    State pitch_accel_by_state{};
    State known{};
    std::vector<double> measured;  // one for each measurement model
};

struct LinearModel {
    core::Car car;
    State x{};                                   // before the first step
    State variance{};                            // likewise, diagonal
    std::array<State, kStates> process_noise{};  // Q, the same at every step
    std::vector<MeasurementModel> measurements;
    std::vector<ModelStep> steps;
};

enum class Measurements {
    heights,             // two: ride heights front and rear
    heights_and_others,  // twelve: beside these ten rows in which every state has a part, drawn from the seed
};

// A straight with the flap opening and closing, at 400 Hz. Truth, noise and rows are drawn from the seed.
[[nodiscard]] LinearModel make_linear_model(Measurements which, std::size_t steps, std::uint64_t seed);

}  // namespace holdfast::bench
