// SPDX-License-Identifier: MIT
// Ride height of an axle's sensors, their roll taken out, against the static value:
//   dh = heave - (x - x_cg) pitch - road                                                    [ride-height]
#pragma once

#include "estimator/core/chassis_filter.hpp"

namespace holdfast::core {

struct RideHeightModel {
    double from_cg_m = 0.0;  // place of the sensors forward of the sprung centre of gravity
    ChassisState road = kRoadFront;

    [[nodiscard]] double predict(const ChassisFilter::Filter::Vector& x) const {
        return x[kHeave] - from_cg_m * x[kPitch] - x[road];
    }
    [[nodiscard]] ChassisFilter::Filter::Vector J_height_state() const {
        ChassisFilter::Filter::Vector h{};
        h[kHeave] = 1.0;
        h[kPitch] = -from_cg_m;
        h[road] = -1.0;
        return h;
    }
};

}  // namespace holdfast::core
