// SPDX-License-Identifier: MIT
// The car as the estimator knows it: what the workshop measured, each value with its standard uncertainty.
// SI units. Plain data of fixed size; estimator/session reads it from the car file and checks it.
#pragma once

#include <array>
#include <cstddef>
#include <cstdint>

#include "proto/vocabulary/channel.hpp"

namespace holdfast::core {

struct Quantity {
    double value = 0.0;
    double sd = 0.0;  // standard uncertainty, same unit as value
};

struct Axle {
    double track_m = 0.0;
    Quantity unsprung_mass_kg;    // one corner
    Quantity wheel_rate_npm;      // one corner, spring at the wheel, N/m
    Quantity anti_roll_rate_npm;  // one corner, N/m
    Quantity damping_nspm;        // one corner at the wheel, mean of bump and rebound, N s/m
    Quantity tyre_rate_npm;       // one tyre, N/m
    Quantity anti_brake_share;    // anti-dive (front), anti-lift (rear): share of the load transfer under
                                  // braking that the links carry past the springs
    Quantity anti_squat_share;    // the same under drive; rear only, 0 at the front
};

struct RideHeightSensor {
    Quantity static_m;                         // value at rest
    double x_m = 0.0;                          // from the front axle line, forward
    double y_m = 0.0;                          // left
    Channel channel = Channel::ride_height_0;  // slot of the frame that carries it
};

struct Car {
    Quantity mass_kg;  // all up at the start of the outing
    Quantity fuel_per_lap_kg;
    double wheelbase_m = 0.0;
    Quantity front_weight_share;  // static share of the weight on the front axle
    Quantity cg_height_m;
    Quantity pitch_inertia_kgm2;  // sprung mass
    Quantity roll_inertia_kgm2;   // sprung mass
    Quantity rolling_resistance;
    Axle front;
    Axle rear;
    double flap_chord_m = 0.0;
    bool flap_angles_known = false;
    Quantity flap_closed_angle_rad;
    Quantity flap_open_angle_rad;
    std::array<RideHeightSensor, kMaxRideHeights> ride_height{};
    std::size_t ride_height_count = 0;
    Quantity tyre_growth_s2pm;  // rise of the axle with the square of speed, m per (m/s)^2
};

}  // namespace holdfast::core
