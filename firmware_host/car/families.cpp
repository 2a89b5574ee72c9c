// SPDX-License-Identifier: MIT
// Orders of magnitude: open-wheel cars after open university lap-time studies and textbooks (mass 660-880 kg,
// wheelbase 3.1-3.6 m, downforce area 2.8-4.9 m^2, drag area 1.15-1.56 m^2, heave 3.5-7 Hz); the two others
// by the same ways of thought, common practice.
#include "firmware_host/car/families.hpp"

#include <cmath>

namespace holdfast::sim {
namespace {

// Damping as a share of critical, rebound stiffer than bump.
void draw_damping(AxleParameters& axle, double sprung_corner_kg, double damping_ratio, Random& random) {
    const double critical = 2.0 * std::sqrt(axle.wheel_rate_npm * sprung_corner_kg);
    const double rebound_over_bump = random.uniform(1.15, 1.7);
    // Around the slow speeds of the heave mode; the digressive knee takes some of it away above.
    const double mean = damping_ratio * critical;
    axle.damping_bump_nspm = 2.0 * mean / (1.0 + rebound_over_bump);
    axle.damping_rebound_nspm = axle.damping_bump_nspm * rebound_over_bump;
    axle.damping_fast_share = random.uniform(0.3, 0.5);
    axle.damping_knee_mps = random.uniform(0.06, 0.14);
}

void draw_dampings(ChassisParameters& car, double least_ratio, double most_ratio, Random& random) {
    const double front_kg = 0.5 * car.mass_kg * car.front_weight_share - car.front.unsprung_mass_kg;
    const double rear_kg = 0.5 * car.mass_kg * (1.0 - car.front_weight_share) - car.rear.unsprung_mass_kg;
    draw_damping(car.front, front_kg, random.uniform(least_ratio, most_ratio), random);
    draw_damping(car.rear, rear_kg, random.uniform(least_ratio, most_ratio), random);
}

// Bump stops near the travel that downforce takes at `speed`.
void draw_bump_stops(Scenario& s, double speed_mps, Random& random) {
    const double pressure_pa = 0.5 * 1.17 * speed_mps * speed_mps;
    AxleParameters& front = s.chassis.front;
    AxleParameters& rear = s.chassis.rear;
    front.bump_stop_gap_m =
        0.5 * pressure_pa * s.aero.front.area_m2 * 1.2 / front.wheel_rate_npm * random.uniform(1.1, 1.35);
    rear.bump_stop_gap_m =
        0.5 * pressure_pa * s.aero.rear.area_m2 * 1.2 / rear.wheel_rate_npm * random.uniform(0.95, 1.15);
    for (AxleParameters* axle : {&front, &rear}) {
        axle->bump_stop_rate_npm = random.uniform(0.3, 1.0) * axle->wheel_rate_npm;
        axle->bump_stop_growth_npm2 = random.uniform(5e6, 2e7);
    }
}

void draw_flap(FlapParameters& flap, Random& random) {
    const double kind = random.uniform();
    flap.shape = kind < 0.5    ? Reattachment::first_order
                 : kind < 0.75 ? Reattachment::separation_point
                               : Reattachment::slow_tail;
    flap.tau_chords = random.uniform(10.0, 16.0);
    flap.tau_scatter = random.uniform(0.03, 0.08);
    flap.tail_share = random.uniform(0.10, 0.25);
    flap.tail_factor = random.uniform(3.0, 5.0);
    flap.dead_chords = random.uniform(2.0, 4.0);
    flap.attach_position = random.uniform(0.28, 0.42);
    flap.opening_time_s = random.uniform(0.03, 0.15);
    flap.smooth_travel = random.happens(0.5);
    flap.actuator_delay_s = random.uniform(0.0, 0.012);
    flap.overhang_m = random.uniform(0.0, 0.35);
}

void draw_links(ChassisParameters& car, Random& random) {
    car.front.anti_brake_share = random.uniform(0.05, 0.30);
    car.rear.anti_brake_share = random.uniform(0.05, 0.25);
    car.rear.anti_squat_share = random.uniform(0.05, 0.35);
    car.front.roll_centre_m = random.uniform(0.02, 0.07);
    car.rear.roll_centre_m = random.uniform(0.03, 0.09);
}

void place_three(Scenario& s) {
    const double rear_x = -s.chassis.wheelbase_m - 0.1;
    s.ride_heights = {{"front", s.aero.floor_front_m, 0.25, 0.0},
                      {"rear_left", s.aero.floor_rear_m + 0.003, rear_x, 0.45},
                      {"rear_right", s.aero.floor_rear_m + 0.003, rear_x, -0.45}};
}

void place_four(Scenario& s) {
    const double rear_x = -s.chassis.wheelbase_m + 0.35;
    s.ride_heights = {{"front_left", s.aero.floor_front_m + 0.004, -0.30, 0.50},
                      {"front_right", s.aero.floor_front_m + 0.004, -0.30, -0.50},
                      {"rear_left", s.aero.floor_rear_m, rear_x, 0.40},
                      {"rear_right", s.aero.floor_rear_m, rear_x, -0.40}};
}

}  // namespace

void draw_open_wheel(Scenario& s, Random& random) {
    ChassisParameters& car = s.chassis;
    car.mass_kg = random.uniform(790.0, 880.0);
    car.fuel_per_lap_kg = random.uniform(1.4, 2.1);
    car.wheelbase_m = random.uniform(3.30, 3.60);
    car.front_weight_share = random.uniform(0.44, 0.47);
    car.cg_height_m = random.uniform(0.28, 0.32);
    car.pitch_inertia_kgm2 = random.uniform(950.0, 1200.0);
    car.roll_inertia_kgm2 = random.uniform(160.0, 230.0);
    car.rolling_resistance = random.uniform(0.012, 0.017);
    car.tyre_growth_s2pm = random.uniform(2.5e-7, 6e-7);
    car.front.track_m = 1.60;
    car.rear.track_m = 1.55;
    car.front.unsprung_mass_kg = random.uniform(17.0, 21.0);
    car.rear.unsprung_mass_kg = random.uniform(20.0, 25.0);
    car.front.wheel_rate_npm = random.uniform(190e3, 260e3);
    car.rear.wheel_rate_npm = random.uniform(140e3, 190e3);
    car.front.anti_roll_rate_npm = random.uniform(60e3, 120e3);
    car.rear.anti_roll_rate_npm = random.uniform(20e3, 45e3);
    car.front.tyre_rate_npm = random.uniform(270e3, 330e3);
    car.rear.tyre_rate_npm = random.uniform(290e3, 350e3);
    draw_dampings(car, 0.45, 0.65, random);
    draw_links(car, random);
    s.aero.floor_front_m = random.uniform(0.042, 0.050);
    s.aero.floor_rear_m = random.uniform(0.090, 0.100);
    s.aero.front = {random.uniform(1.55, 1.80), random.uniform(0.15, 0.30), random.uniform(-0.010, 0.006),
                    0.024};
    s.aero.rear = {random.uniform(2.15, 2.50), random.uniform(0.15, 0.30), random.uniform(0.010, 0.032),
                   0.045};
    s.aero.drag_base_m2 = random.uniform(0.62, 0.78);
    s.aero.drag_per_downforce2 = random.uniform(0.022, 0.033);
    draw_flap(s.flap, random);
    s.flap.chord_m = random.uniform(0.20, 0.28);
    s.flap.area_m2 = random.uniform(0.70, 1.20);
    s.flap.drag_area_m2 = random.uniform(0.0, 0.12);
    draw_bump_stops(s, 88.0, random);
    s.driver.power_w = random.uniform(560e3, 660e3);
    s.driver.closing_time_least_s = 0.03;
    s.driver.closing_time_most_s = 0.12;
    place_three(s);
}

void draw_prototype(Scenario& s, Random& random) {
    ChassisParameters& car = s.chassis;
    car.mass_kg = random.uniform(980.0, 1120.0);
    car.fuel_per_lap_kg = random.uniform(1.8, 2.8);
    car.wheelbase_m = random.uniform(3.00, 3.20);
    car.front_weight_share = random.uniform(0.46, 0.49);
    car.cg_height_m = random.uniform(0.29, 0.34);
    car.pitch_inertia_kgm2 = random.uniform(1200.0, 1500.0);
    car.roll_inertia_kgm2 = random.uniform(280.0, 380.0);
    car.tyre_growth_s2pm = random.uniform(3e-7, 6e-7);
    car.front.track_m = 1.62;
    car.rear.track_m = 1.60;
    car.front.unsprung_mass_kg = random.uniform(24.0, 30.0);
    car.rear.unsprung_mass_kg = random.uniform(27.0, 34.0);
    car.front.wheel_rate_npm = random.uniform(180e3, 260e3);
    car.rear.wheel_rate_npm = random.uniform(150e3, 220e3);
    car.front.anti_roll_rate_npm = random.uniform(40e3, 90e3);
    car.rear.anti_roll_rate_npm = random.uniform(20e3, 50e3);
    car.front.tyre_rate_npm = random.uniform(300e3, 380e3);
    car.rear.tyre_rate_npm = random.uniform(320e3, 400e3);
    draw_dampings(car, 0.40, 0.60, random);
    draw_links(car, random);
    s.aero.floor_front_m = random.uniform(0.045, 0.055);
    s.aero.floor_rear_m = random.uniform(0.065, 0.080);
    s.aero.front = {random.uniform(1.35, 1.65), random.uniform(0.12, 0.25), random.uniform(0.000, 0.014),
                    0.026};
    s.aero.rear = {random.uniform(1.75, 2.15), random.uniform(0.12, 0.25), random.uniform(0.008, 0.026),
                   0.036};
    s.aero.drag_base_m2 = random.uniform(0.55, 0.65);
    s.aero.drag_per_downforce2 = random.uniform(0.020, 0.030);
    draw_flap(s.flap, random);
    s.flap.chord_m = random.uniform(0.18, 0.24);
    s.flap.area_m2 = random.uniform(0.45, 0.75);
    s.flap.drag_area_m2 = random.uniform(0.0, 0.10);
    draw_bump_stops(s, 85.0, random);
    s.driver.power_w = random.uniform(470e3, 540e3);
    s.driver.drive_limit_n = 11500.0;
    s.driver.grip = 1.50;
    s.driver.braking_grip = 1.50;
    s.driver.braking_limit_mps2 = random.uniform(36.0, 44.0);
    s.driver.brake_gain_nppa = random.uniform(5e-3, 7e-3);
    s.driver.closing_time_least_s = 0.05;
    s.driver.closing_time_most_s = 0.18;
    s.driver.lift_s = random.uniform(0.0, 0.15);
    place_four(s);
}

void draw_heavy_closed(Scenario& s, Random& random) {
    ChassisParameters& car = s.chassis;
    car.mass_kg = random.uniform(1270.0, 1450.0);
    car.fuel_per_lap_kg = random.uniform(2.0, 3.2);
    car.wheelbase_m = random.uniform(2.60, 2.80);
    car.front_weight_share = random.uniform(0.43, 0.50);
    car.cg_height_m = random.uniform(0.40, 0.47);
    car.pitch_inertia_kgm2 = random.uniform(1700.0, 2200.0);
    car.roll_inertia_kgm2 = random.uniform(380.0, 520.0);
    car.tyre_growth_s2pm = random.uniform(2e-7, 5e-7);
    car.front.track_m = 1.66;
    car.rear.track_m = 1.63;
    car.front.unsprung_mass_kg = random.uniform(34.0, 42.0);
    car.rear.unsprung_mass_kg = random.uniform(37.0, 46.0);
    car.front.wheel_rate_npm = random.uniform(150e3, 220e3);
    car.rear.wheel_rate_npm = random.uniform(140e3, 200e3);
    car.front.anti_roll_rate_npm = random.uniform(50e3, 100e3);
    car.rear.anti_roll_rate_npm = random.uniform(30e3, 60e3);
    car.front.tyre_rate_npm = random.uniform(300e3, 380e3);
    car.rear.tyre_rate_npm = random.uniform(320e3, 400e3);
    draw_dampings(car, 0.40, 0.60, random);
    draw_links(car, random);
    s.aero.floor_front_m = random.uniform(0.055, 0.065);
    s.aero.floor_rear_m = random.uniform(0.070, 0.085);
    s.aero.front = {random.uniform(0.75, 1.00), random.uniform(0.10, 0.20), random.uniform(0.010, 0.026),
                    0.032};
    s.aero.rear = {random.uniform(1.30, 1.60), random.uniform(0.08, 0.18), random.uniform(0.015, 0.035),
                   0.045};
    s.aero.drag_base_m2 = random.uniform(0.70, 0.80);
    s.aero.drag_per_downforce2 = random.uniform(0.025, 0.040);
    draw_flap(s.flap, random);
    s.flap.chord_m = random.uniform(0.20, 0.30);
    s.flap.area_m2 = random.uniform(0.45, 0.65);
    s.flap.drag_area_m2 = random.uniform(0.02, 0.10);
    draw_bump_stops(s, 80.0, random);
    s.driver.power_w = random.uniform(400e3, 470e3);
    s.driver.drive_limit_n = 11000.0;
    s.driver.grip = 1.45;
    s.driver.braking_grip = 1.40;
    s.driver.lateral_limit_mps2 = 24.0;
    s.driver.braking_limit_mps2 = random.uniform(27.0, 32.0);
    s.driver.brake_gain_nppa = random.uniform(6e-3, 8e-3);
    s.driver.brake_rise_s = random.uniform(0.12, 0.20);
    s.driver.closing_time_least_s = 0.08;
    s.driver.closing_time_most_s = 0.20;
    s.driver.gap_most_s = 0.50;
    s.driver.lift_s = random.uniform(0.05, 0.25);
    place_three(s);
}

}  // namespace holdfast::sim
