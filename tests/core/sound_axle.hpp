// SPDX-License-Identifier: MIT
// The small car's rear axle in motion: loads, heights and lateral acceleration that belong together, with
// noise, so that one of them can be spoiled. Times in seconds, 200 Hz.
#pragma once

#include <cmath>
#include <random>

#include "estimator/core/axle_watch.hpp"
#include "tests/core/small_car.hpp"

namespace holdfast::testing {

inline constexpr double kAxleStep_s = 0.005;

class SoundAxle {
  public:
    explicit SoundAxle(std::uint64_t seed) : car_(rear_rates()), random_(seed) {}
    [[nodiscard]] const core::Car& car() const { return car_; }

    struct Truth {
        double sum_n = 0.0;
        double dh_m = 0.0;
        double accel_y_mps2 = 0.0;
        double speed_mps = 60.0;
    };
    [[nodiscard]] Truth truth(double time_s) const {
        Truth t;
        t.accel_y_mps2 = 22.0 * std::sin(0.5 * time_s) * std::sin(0.13 * time_s);
        t.speed_mps = 55.0 + 15.0 * std::sin(0.2 * time_s);
        const double above_rest_n = 1.6 * t.speed_mps * t.speed_mps + 300.0 * std::sin(7.0 * time_s);
        t.sum_n = core::ChassisConstants(car_).weight_rear_n + above_rest_n;
        t.dh_m = -above_rest_n / kAxleRate_npm + car_.tyre_growth_s2pm.value * t.speed_mps * t.speed_mps;
        return t;
    }
    // The frame of an instant as the sensors would log it.
    [[nodiscard]] Frame frame(double time_s) {
        const Truth t = truth(time_s);
        std::normal_distribution<double> normal;
        Frame frame;
        frame.time_ns = std::llround(time_s * 1e9);
        const double side_n = 50.0 * t.accel_y_mps2;
        frame.set(Channel::load_rl, 0.5 * t.sum_n - side_n + 30.0 * normal(random_));
        frame.set(Channel::load_rr, 0.5 * t.sum_n + side_n + 30.0 * normal(random_));
        for (std::size_t i = 0; i < car_.ride_height_count; ++i) {
            const core::RideHeightSensor& s = car_.ride_height[i];
            const double roll = 4e-4 * t.accel_y_mps2;
            frame.set(s.channel, s.static_m.value + t.dh_m + s.y_m * roll + 3e-4 * normal(random_));
        }
        frame.set(Channel::accel_y, t.accel_y_mps2 + 0.3 * normal(random_));
        return frame;
    }

  private:
    static constexpr double kWheelRate_npm = 160e3, kTyreRate_npm = 320e3;
    static constexpr double kAxleRate_npm =
        2.0 * kWheelRate_npm * kTyreRate_npm / (kWheelRate_npm + kTyreRate_npm);
    static core::Car rear_rates() {
        core::Car car = small_car();
        car.rear.wheel_rate_npm = {kWheelRate_npm, 0.03 * kWheelRate_npm};
        car.rear.tyre_rate_npm = {kTyreRate_npm, 0.05 * kTyreRate_npm};
        car.rear.damping_nspm = {4300.0, 650.0};
        return car;
    }

    core::Car car_;
    std::mt19937_64 random_;
};

}  // namespace holdfast::testing
