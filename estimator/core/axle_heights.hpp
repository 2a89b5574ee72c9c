// SPDX-License-Identifier: MIT
// The ride-height sensors of one axle as one height on the car's centre line: roll is taken out where two or
// more sensors stand left and right of each other. Heights are against the static value, m, up positive.
#pragma once

#include <array>
#include <cstdint>
#include <optional>

#include "estimator/core/car.hpp"
#include "estimator/core/intake.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::core {

class AxleHeights {
  public:
    // Sensors of the car that belong to this axle: the nearer one.
    AxleHeights(const Car& car, bool rear);

    struct Height {
        double dh_m = 0.0;
        double noise_gain = 1.0;  // sum of squared weights: noise variance of dh over a single sensor's
    };
    // From the samples admitted in this frame; nothing where none came. roll_rad: left side up.
    [[nodiscard]] std::optional<Height> take(const Frame& frame, std::uint64_t admitted, double roll_rad);

    [[nodiscard]] bool can_tell_roll() const { return can_tell_roll_; }
    [[nodiscard]] double roll_rad() const { return roll_rad_; }  // newest, where this axle can tell
    [[nodiscard]] double dh_m() const { return dh_m_; }  // newest; not smoothed: the areas follow at once
    [[nodiscard]] double x_m() const { return x_m_; }    // mean place, forward of the front axle line
    [[nodiscard]] double noise_sd_m(const Intake& intake) const;  // of a single sensor
    [[nodiscard]] std::size_t count() const { return count_; }
    [[nodiscard]] const RideHeightSensor& sensor(std::size_t i) const { return sensor_[i]; }
    // Time since the last sensor's sample, s.
    [[nodiscard]] double age_s(double time_s) const { return time_s - last_sample_s_; }
    // A height from elsewhere while the sensors are lost.
    void stand_in(double dh_m, double time_s);
    [[nodiscard]] double stood_in_until_s() const { return stood_in_s_; }

  private:
    std::array<RideHeightSensor, kMaxRideHeights> sensor_{};
    std::size_t count_ = 0;
    double x_m_ = 0.0;
    bool can_tell_roll_ = false;
    double roll_rad_ = 0.0;
    double dh_m_ = 0.0;
    double last_sample_s_ = 0.0;
    double stood_in_s_ = 0.0;
};

}  // namespace holdfast::core
