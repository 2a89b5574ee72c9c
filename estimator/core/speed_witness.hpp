// SPDX-License-Identifier: MIT
// Whether the speed sensor and the lap distance agree, and if not, which of them is off. A sensor that drifts
// parts from the distance bit by bit; a distance that is stuck, reset or made up parts from it at once, while
// the accelerometer goes on agreeing with the sensor. (A sensor that jumps is refused by the filter before.)
#pragma once

#include <algorithm>
#include <cmath>

#include "estimator/core/distance_speed.hpp"

namespace holdfast::core {

class SpeedWitness {
  public:
    // A window in which the sensor was heard and not refused.
    void compare(const DistanceSpeed::Window& w) {
        const double off = w.by_distance_mps - w.sensor_mps;
        const double jump = std::abs(off - off_mps_);
        const double limit = kOff_mps + kOffShare * w.sensor_mps;
        if (jump > limit) quiet_s_ = 0.0;
        off_mps_ += std::min(w.span_s / kMean_s, 1.0) * (off - off_mps_);
        const double bias_mps = bias_ * w.sensor_mps;
        const bool apart = std::abs(off_mps_ - bias_mps) > limit;
        apart_s_ = apart ? apart_s_ + w.span_s : 0.0;
        agree_s_ = apart ? 0.0 : agree_s_ + w.span_s;
        quiet_s_ = apart ? quiet_s_ : quiet_s_ + w.span_s;
        if (std::abs(off_mps_ - bias_mps) < 0.5 * limit && w.sensor_mps > 10.0)
            bias_ += w.span_s / kBiasMemory_s * (off / w.sensor_mps - bias_);
    }
    // Noise of a window's speed against the filter's, while both are sound.
    void learn_noise(double innovation_mps) {
        variance_ += 0.02 * (std::min(innovation_mps * innovation_mps, 4.0) - variance_);
    }

    // The sensor has drifted away from the distance.
    [[nodiscard]] bool sensor_drifts() const { return apart_s_ > kApart_s && !parted_at_once(); }
    // The distance may stand in for the sensor: it agreed with it for some seconds before.
    [[nodiscard]] bool distance_sound() const {
        return agree_s_ > kAgree_s || (apart_s_ > 0.0 && !parted_at_once());
    }
    [[nodiscard]] double noise_sd_mps() const { return std::max(std::sqrt(variance_), 0.1); }

  private:
    [[nodiscard]] bool parted_at_once() const { return quiet_s_ < kAgree_s; }

    static constexpr double kOff_mps = 0.6, kOffShare = 0.008;  // beyond slip, tyre wear and the racing line
    static constexpr double kMean_s = 1.0;
    static constexpr double kApart_s = 0.5;
    static constexpr double kAgree_s = 5.0;
    static constexpr double kBiasMemory_s = 60.0;

    double off_mps_ = 0.0;  // distance less sensor, mean of late
    double bias_ = 0.0;     // the same in the long run, relative: calibration of either
    double apart_s_ = 0.0, agree_s_ = 0.0;
    double quiet_s_ = 0.0;  // since the difference last jumped, time apart not counted
    double variance_ = 0.25;
};

}  // namespace holdfast::core
