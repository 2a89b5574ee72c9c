// SPDX-License-Identifier: MIT
// Vertical acceleration at the centre of gravity, gravity in it:  a_z = g + heave acceleration [accel-z] The
// heave acceleration is the force balance of the step just predicted, so that this measurement speaks
// straight of the areas, without the road.
#pragma once

#include "estimator/core/chassis_filter.hpp"

namespace holdfast::core {

struct AccelZModel {
    static constexpr double kGravity = 9.80665;

    [[nodiscard]] static double predict(const ChassisFilter::Filter::Vector& x, const ChassisStep& step) {
        return kGravity + step.heave_accel_mps2 + x[kAccelZOffset];
    }
    [[nodiscard]] static ChassisFilter::Filter::Vector J_accel_state(const ChassisStep& step) {
        auto h = step.heave_accel_by_state;
        h[kAccelZOffset] = 1.0;
        return h;
    }
};

}  // namespace holdfast::core
