// SPDX-License-Identifier: MIT
// When the brakes come on: from the brake pressure where it is logged, else from the longitudinal
// acceleration.
#pragma once

#include <optional>

namespace holdfast::core {

class BrakeOnset {
  public:
    // Each returns the instant of onset once per braking, in s of source time.
    [[nodiscard]] std::optional<double> pressure(double time_s, double pressure_pa);
    // accel_without_brakes: what drag and rolling alone would give, m/s^2 (negative).
    [[nodiscard]] std::optional<double> acceleration(double time_s, double accel_mps2,
                                                     double accel_without_brakes_mps2);

    // The pressure is not to be had any more: acceleration takes over until it comes again.
    void pressure_lost() {
        have_pressure_ = false;
        idle_s_ = 0.0;
    }

    // The car decelerates as only brakes can while the pressure says that they are off; or it does not at all
    // for a second while the pressure says that they are on.
    [[nodiscard]] bool pressure_disagrees() const { return disagrees_s_ > kDisagrees_s || idle_s_ > kIdle_s; }

    [[nodiscard]] bool braking() const { return braking_; }

  private:
    static constexpr double kDisagrees_s = 0.08;
    static constexpr double kIdle_s = 1.0;

    bool braking_ = false;
    double disagrees_s_ = 0.0;
    double idle_s_ = 0.0;
    bool have_pressure_ = false;
    double rest_pa_ = 0.0;  // reading with the brakes off
    double before_time_s_ = 0.0;
    double before_pa_ = 0.0;
    double smooth_mps2_ = 0.0;
    double smooth_time_s_ = 0.0;
    double began_s_ = 0.0;  // when the deceleration last passed the level at which it may be the brakes'
};

}  // namespace holdfast::core
