// SPDX-License-Identifier: MIT
// An invented open-wheel car, and chassis inputs as it might feel them on a straight.
#pragma once

#include "estimator/core/car.hpp"
#include "estimator/core/chassis_filter.hpp"

namespace holdfast::testing {

[[nodiscard]] inline core::Car small_car() {
    core::Car car;
    car.mass_kg = {780.0, 3.9};
    car.fuel_per_lap_kg = {1.7, 0.17};
    car.wheelbase_m = 3.4;
    car.front_weight_share = {0.455, 0.002};
    car.cg_height_m = {0.30, 0.015};
    car.pitch_inertia_kgm2 = {1100.0, 110.0};
    car.roll_inertia_kgm2 = {200.0, 20.0};
    car.rolling_resistance = {0.015, 0.0015};
    car.front.track_m = 1.6;
    car.front.unsprung_mass_kg = {19.0, 1.0};
    car.front.anti_brake_share = {0.18, 0.03};
    car.rear.track_m = 1.55;
    car.rear.unsprung_mass_kg = {22.0, 1.1};
    car.rear.anti_brake_share = {0.12, 0.03};
    car.rear.anti_squat_share = {0.20, 0.03};
    car.flap_chord_m = 0.24;
    car.ride_height[0] = {{0.045, 0.0005}, 0.25, 0.0, ride_height_channel(0)};
    car.ride_height[1] = {{0.098, 0.0005}, -3.6, 0.45, ride_height_channel(1)};
    car.ride_height[2] = {{0.098, 0.0005}, -3.6, -0.45, ride_height_channel(2)};
    car.ride_height_count = 3;
    car.tyre_growth_s2pm = {3.0e-7, 6e-8};
    return car;
}

// 80 m/s, gently accelerating, loads about in balance with some 1.8 m^2 at each axle.
[[nodiscard]] inline core::ChassisInput small_car_input() {
    core::ChassisInput in;
    in.dt_s = 0.0025;
    in.dynamic_pressure_pa = 3800.0;
    in.speed_mps = 80.0;
    in.course_rad = 0.7;
    in.load_front_n = 9900.0;
    in.load_rear_n = 10500.0;
    in.load_noise_front_n2s = 250.0;
    in.load_noise_rear_n2s = 300.0;
    in.dh_front_m = -0.012;
    in.dh_rear_m = -0.021;
    in.accel_x_mps2 = 2.0;
    in.transfer_force_n = 6000.0;
    in.fuel_burnt_kg = 3.0;
    in.missing = 0.6;
    in.road_front_m2ps = 2e-5;
    in.road_rear_m2ps = 3e-5;
    return in;
}

}  // namespace holdfast::testing
