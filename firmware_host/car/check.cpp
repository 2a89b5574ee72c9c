// SPDX-License-Identifier: MIT
#include "firmware_host/car/check.hpp"

#include <cmath>
#include <sstream>
#include <stdexcept>

namespace holdfast::sim {
namespace {

struct Range {
    const char* name;
    double value;
    double least;
    double most;
};

void check(const Range& range) {
    if (range.value >= range.least && range.value <= range.most) return;  // false for NaN as well
    std::ostringstream message;
    message << "simulated car: " << range.name << " is " << range.value << ", expected " << range.least
            << " to " << range.most;
    throw std::invalid_argument(message.str());
}

void check_axle(const AxleParameters& axle, const std::string& where) {
    const auto one = [&](const char* name, double value, double least, double most) {
        const std::string full = where + "." + name;
        check({full.c_str(), value, least, most});
    };
    one("track_m", axle.track_m, 0.5, 3.0);
    one("unsprung_mass_kg", axle.unsprung_mass_kg, 3.0, 200.0);
    one("wheel_rate_npm", axle.wheel_rate_npm, 5e3, 1e6);
    one("anti_roll_rate_npm", axle.anti_roll_rate_npm, 0.0, 1e6);
    one("damping_bump_nspm", axle.damping_bump_nspm, 0.0, 30e3);
    one("damping_rebound_nspm", axle.damping_rebound_nspm, 0.0, 30e3);
    one("damping_fast_share", axle.damping_fast_share, 0.0, 1.0);
    one("damping_knee_mps", axle.damping_knee_mps, 1e-3, 10.0);
    one("bump_stop_gap_m", axle.bump_stop_gap_m, 0.0, 1.0);
    one("bump_stop_rate_npm", axle.bump_stop_rate_npm, 0.0, 1e6);
    one("bump_stop_growth_npm2", axle.bump_stop_growth_npm2, 0.0, 1e9);
    one("tyre_rate_npm", axle.tyre_rate_npm, 20e3, 1e6);
    one("tyre_damping_nspm", axle.tyre_damping_nspm, 0.0, 5e3);
    one("anti_brake_share", axle.anti_brake_share, -1.0, 1.0);
    one("anti_squat_share", axle.anti_squat_share, -1.0, 1.0);
    one("roll_centre_m", axle.roll_centre_m, -0.2, 0.5);
}

}  // namespace

const Scenario& checked(const Scenario& s) {
    const double lateral_limit = s.driver.lateral_limit_mps2;
    const double unsprung_front_kg = 2.0 * s.chassis.front.unsprung_mass_kg;
    const double unsprung_rear_kg = 2.0 * s.chassis.rear.unsprung_mass_kg;
    double lap_m = 0.0;
    for (const Segment& segment : s.circuit.segments) {
        check({"circuit.segments.length_m", segment.length_m, 1.0, 1e5});
        check({"circuit.segments.curvature_pm", segment.curvature_pm, -0.2, 0.2});
        lap_m += segment.length_m;
    }
    for (const Kerb& kerb : s.circuit.kerbs) {
        check({"circuit.kerbs.distance_m", kerb.distance_m, 0.0, lap_m});
        check({"circuit.kerbs.length_m", kerb.length_m, 0.2, 100.0});
        check({"circuit.kerbs.height_m", kerb.height_m, 0.0, 0.1});
    }
    const Range ranges[] = {
        {"laps", static_cast<double>(s.laps), 1.0, 1e6},
        {"frame_rate_hz", s.frame_rate_hz, 50.0, 2000.0},
        {"circuit length (m)", lap_m, 100.0, 1e5},
        {"circuit.transition_m", s.circuit.transition_m, 0.5, 200.0},
        {"chassis.mass_kg", s.chassis.mass_kg, 200.0, 4000.0},
        {"chassis.wheelbase_m", s.chassis.wheelbase_m, 1.0, 6.0},
        {"chassis.front_weight_share", s.chassis.front_weight_share, 0.2, 0.8},
        {"chassis.cg_height_m", s.chassis.cg_height_m, 0.0, 1.5},
        {"chassis.pitch_inertia_kgm2", s.chassis.pitch_inertia_kgm2, 50.0, 2e4},
        {"chassis.roll_inertia_kgm2", s.chassis.roll_inertia_kgm2, 20.0, 1e4},
        {"chassis.rolling_resistance", s.chassis.rolling_resistance, 0.0, 0.1},
        {"chassis.fuel_per_lap_kg over all laps", s.chassis.fuel_per_lap_kg * s.laps, 0.0,
         0.4 * s.chassis.mass_kg},
        {"front sprung mass (kg)", s.chassis.mass_kg * s.chassis.front_weight_share - unsprung_front_kg, 20.0,
         4e3},
        {"rear sprung mass (kg)", s.chassis.mass_kg * (1.0 - s.chassis.front_weight_share) - unsprung_rear_kg,
         20.0, 4e3},
        {"aero.front.width_m", s.aero.front.width_m, 1e-3, 10.0},
        {"aero.rear.width_m", s.aero.rear.width_m, 1e-3, 10.0},
        {"flap.chord_m", s.flap.chord_m, 0.02, 2.0},
        {"flap.area_m2", s.flap.area_m2, 0.0, 5.0},
        {"flap.opening_time_s", s.flap.opening_time_s, 0.001, 5.0},
        {"flap.opening_detach_tau_s", s.flap.opening_detach_tau_s, 1e-4, 1.0},
        {"flap.tau_chords", s.flap.tau_chords, 0.1, 1e3},
        {"flap.tail_share", s.flap.tail_share, 0.0, 0.9},
        {"flap.tail_factor", s.flap.tail_factor, 1.0, 50.0},
        {"road.roughness_m3", s.road.roughness_m3, 0.0, 1e-3},
        {"road.left_right_correlation", s.road.left_right_correlation, 0.0, 1.0},
        {"road.repeat_share", s.road.repeat_share, 0.0, 1.0},
        {"road.longest_wave_m", s.road.longest_wave_m, 1.0, 1e4},
        {"road.patch_m", s.road.patch_m, 1e-3, 1.0},
        {"air.temperature_k", s.air.temperature_k, 230.0, 330.0},
        {"air.pressure_pa", s.air.pressure_pa, 5e4, 1.1e5},
        {"air.relative_humidity", s.air.relative_humidity, 0.0, 1.0},
        {"air.gust_time_s", s.air.gust_time_s, 0.01, 1e3},
        {"driver.power_w", s.driver.power_w, 1e4, 3e6},
        {"driver.lateral_limit_mps2", lateral_limit, 1.0, 80.0},
        {"driver.braking_limit_mps2", s.driver.braking_limit_mps2, 1.0, 80.0},
        {"driver.brake_gain_nppa", s.driver.brake_gain_nppa, 1e-5, 1.0},
        {"driver.brake_rise_s", s.driver.brake_rise_s, 1e-3, 2.0},
        {"driver.throttle_rise_s", s.driver.throttle_rise_s, 1e-3, 10.0},
        {"driver.start_speed_mps", s.driver.start_speed_mps, 1.0, 100.0},
        {"driver.closing_time_least_s", s.driver.closing_time_least_s, 1e-3, s.driver.closing_time_most_s},
        {"driver.gap_least_s", s.driver.gap_least_s, 0.0, s.driver.gap_most_s},
        {"ride heights", static_cast<double>(s.ride_heights.size()), 0.0,
         static_cast<double>(kMaxRideHeights)},
    };
    for (const Range& range : ranges) check(range);
    check_axle(s.chassis.front, "chassis.front");
    check_axle(s.chassis.rear, "chassis.rear");
    for (std::size_t i = 0; i < kChannelCount; ++i) {
        if (!s.sensors[i].fitted) continue;
        const std::string channel = "sensor " + std::string(info(static_cast<Channel>(i)).name);
        check({(channel + " rate_hz").c_str(), s.sensors[i].rate_hz, 1e-3, s.frame_rate_hz});
        check({(channel + " latency_s").c_str(), s.sensors[i].latency_s, 0.0, kLatencyLimitS});
    }
    return s;
}

}  // namespace holdfast::sim
