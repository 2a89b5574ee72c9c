// SPDX-License-Identifier: MIT
// A car file for the tests of this folder.
#pragma once

#include <string>

namespace holdfast::testing {

inline const std::string kSmallCar = R"(# an invented car
[car]
name = "Number 12"
mass = 780
fuel_per_lap = 1.7
wheelbase = 3.4
front_weight_share = 0.455
cg_height = 0.3
pitch_inertia = 1100
roll_inertia = 200
rolling_resistance = 0.015

[front]
track = 1.6
unsprung_mass = 19
wheel_rate = 231000
anti_roll_rate = 100000
damping = 6800
tyre_rate = 301000
anti_dive = 0.18

[rear]
track = 1.55
unsprung_mass = 22
wheel_rate = 162000
anti_roll_rate = 30000
damping = 4300
tyre_rate = 322000
anti_lift = 0.12
anti_squat = 0.2

[flap]
chord = 0.24

[ride_height]
rear_left = { static = 0.098, x = -3.6, y = 0.45 }
front = { static = 0.045, x = 0.25, y = 0.0 }
rear_right = { static = 0.098, x = -3.6, y = -0.45 }
tyre_growth = 3.0e-7
)";

}  // namespace holdfast::testing
