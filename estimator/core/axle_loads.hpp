// SPDX-License-Identifier: MIT
// The two suspension loads of one axle as one force. Where a corner's sensor is silent or distrusted, its
// load is taken from the other corner and the lateral transfer that the watch has learned; where both are,
// from the ride height; each with the uncertainty that this costs.
#pragma once

#include <cstdint>

#include "estimator/core/axle_watch.hpp"
#include "estimator/core/intake.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::core {

class AxleLoads {
  public:
    AxleLoads(Channel left, Channel right) : left_(left), right_(right) {}

    struct Load {
        double sum_n = 0.0;
        double noise_density_n2s = 0.0;  // two-sided spectral density of the sum's noise
        bool known = false;              // from at least one load sensor or, dh_known, from the ride height
    };
    struct Surroundings {
        double accel_y_mps2 = 0.0;
        double speed_mps = 0.0;
        double dh_m = 0.0;  // ride height of the axle against static
        bool dh_known = false;
    };
    // Newest load of the axle; samples admitted in this frame are taken in first.
    [[nodiscard]] Load take(const Frame& frame, std::uint64_t admitted, const Intake& intake,
                            const AxleWatch& watch, const Surroundings& around);

  private:
    Channel left_, right_;
    double left_n_ = 0.0, right_n_ = 0.0;
};

}  // namespace holdfast::core
