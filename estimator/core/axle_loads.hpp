// SPDX-License-Identifier: MIT
// The two suspension loads of one axle as one force. Where a corner's sensor is silent or distrusted, its
// load is taken from the other corner and the lateral transfer learned so far, with the uncertainty that this
// costs.
#pragma once

#include <cstdint>

#include "estimator/core/intake.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::core {

class AxleLoads {
  public:
    AxleLoads(Channel left, Channel right) : left_(left), right_(right) {}

    struct Load {
        double sum_n = 0.0;
        double noise_density_n2s = 0.0;  // two-sided spectral density of the sum's noise
        bool known = false;              // false: both corners are missing
    };
    // Newest load of the axle; samples admitted in this frame are taken in first.
    [[nodiscard]] Load take(const Frame& frame, std::uint64_t admitted, const Intake& intake,
                            double accel_y_mps2);

  private:
    void learn_transfer(double difference_n, double accel_y_mps2);

    Channel left_, right_;
    double left_n_ = 0.0, right_n_ = 0.0;
    // (left - right) = offset + gain a_y, by recursive least squares with forgetting.
    double gain_kg_ = 0.0, offset_n_ = 0.0;
    double p_gg_ = 1e6, p_go_ = 0.0, p_oo_ = 1e6;
};

}  // namespace holdfast::core
