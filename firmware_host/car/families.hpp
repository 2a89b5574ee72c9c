// SPDX-License-Identifier: MIT
// Kinds of car, circuits and sensors, drawn within ranges.
#pragma once

#include "firmware_host/car/random.hpp"
#include "firmware_host/car/scenario.hpp"

namespace holdfast::sim {

void draw_open_wheel(Scenario& scenario, Random& random);
void draw_prototype(Scenario& scenario, Random& random);
void draw_heavy_closed(Scenario& scenario, Random& random);

// A circuit that turns once round to the left in all, with `flap_straights` long straights.
[[nodiscard]] CircuitParameters draw_circuit(int flap_straights, double long_straight_m, Random& random);

// The sensors that every car has, with their own gains, offsets and drifts. `error_scale` multiplies all of
// these.
[[nodiscard]] SensorTable draw_sensors(std::size_t ride_heights, double error_scale, Random& random);
// Fits those that only some cars have: accel_z, pitot, heading, yaw rate.
void fit_extra_sensors(SensorTable& sensors, double error_scale, Random& random);

}  // namespace holdfast::sim
