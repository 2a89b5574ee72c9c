// SPDX-License-Identifier: MIT
// Everything about the simulated car that can be set: the true car, its flap, the air, the road and the
// driver. SI units, ISO 8855 axes (x forward, y left, z up; pitch positive nose down, roll positive left side
// up). The defaults are one plausible open-wheel car; scenario.hpp draws others.
#pragma once

#include <cstdint>
#include <limits>
#include <string>
#include <vector>

namespace holdfast::sim {

inline constexpr double kGravity = 9.80665;  // m/s^2, standard

// ---- chassis ----

// One axle. Rates, masses and forces are of one corner, at the wheel.
struct AxleParameters {
    double track_m = 1.6;
    double unsprung_mass_kg = 19.0;
    double wheel_rate_npm = 230e3;
    double anti_roll_rate_npm = 60e3;      // added to the corner's rate in pure roll
    double damping_bump_nspm = 5500.0;     // at low speed
    double damping_rebound_nspm = 8000.0;  // at low speed
    double damping_fast_share = 0.35;      // slope far above the knee over the slope at low speed
    double damping_knee_mps = 0.08;        // damper speed where the slope begins to fall
    double bump_stop_gap_m = 0.022;        // compression from rest to first touch
    double bump_stop_rate_npm = 150e3;     // at first touch
    double bump_stop_growth_npm2 = 30e6;   // the rate grows with the square term 1/2 growth x^2
    double tyre_rate_npm = 300e3;
    double tyre_damping_nspm = 250.0;
    double anti_brake_share = 0.15;  // anti-dive (front), anti-lift (rear)
    double anti_squat_share = 0.0;   // rear only
    double roll_centre_m = 0.04;     // height: share of the lateral transfer that the links carry
};

struct ChassisParameters {
    double mass_kg = 835.0;  // all up at the start
    double fuel_per_lap_kg = 1.7;
    double wheelbase_m = 3.55;
    double front_weight_share = 0.455;
    double cg_height_m = 0.30;
    double pitch_inertia_kgm2 = 1100.0;  // sprung mass
    double roll_inertia_kgm2 = 200.0;    // sprung mass
    double rolling_resistance = 0.015;
    double rotating_mass_share = 0.0;  // wheels and drive line: added to the mass that has to be accelerated
    double slip_drive_pn = 6e-7;  // the wheels that `speed` is read from run faster by this share per newton
    double slip_brake_pn = 3e-7;  // and slower under the brakes
    double vibration_mps2 = 0.5;  // amplitude of the engine's shaking in the accelerations
    double vibration_hz = 31.0;
    double tyre_growth_s2pm = 3e-7;  // rise of the axle, m per (m/s)^2
    AxleParameters front;
    AxleParameters rear;
};

// ---- aerodynamics ----

// An area with a smooth optimum in ride height: area (1 + gain / (1 + ((h - best) / width)^2)).
struct AreaOverRideHeight {
    double area_m2 = 2.0;  // far from the optimum
    double gain = 0.25;
    double best_height_m = 0.010;
    double width_m = 0.020;
};

// Areas as an axle balance under the tyres reads them at steady speed: the drag's pitching moment is in them.
// Heights are of the floor over the road at the axle lines.
struct AeroParameters {
    double floor_front_m = 0.045;  // height at rest
    double floor_rear_m = 0.095;
    AreaOverRideHeight front{1.70, 0.30, 0.008, 0.018};
    AreaOverRideHeight rear{2.30, 0.30, 0.045, 0.030};
    double front_per_pitch_m2prad = 4.0;  // front area gained and rear area lost by nose-down pitch
    double drag_base_m2 = 0.70;           // drag area without downforce
    double drag_per_downforce2 = 0.033;   // induced drag: area per square of the whole downforce area, 1/m^2
};

// How the flow comes back after a closing.
enum class Reattachment : std::uint8_t {
    first_order,       // 1 - exp(-t/tau)
    separation_point,  // x relaxes to first order, lift ((1 + sqrt x)/2)^2 (Goman and Khrabrov 1994), mapped
                       // to 0..1
    slow_tail,         // first order, a share of it with a longer time constant
};

struct FlapParameters {
    double chord_m = 0.24;
    double area_m2 = 1.0;        // downforce area that the flap switches, at the rear axle
    double overhang_m = 0.6;     // wing behind the rear axle: losing it at the rear, the front gains a little
    double drag_area_m2 = 0.25;  // drag area that goes with it, beside the induced drag
    double opening_time_s = 0.08;
    double opening_detach_tau_s = 0.004;
    double detach_position = 0.15;  // opening beyond it detaches the flow
    double attach_position = 0.33;  // closing below it lets the flow come back
    double dead_chords = 3.0;       // after that, nothing comes back for so long
    Reattachment shape = Reattachment::first_order;
    double tau_chords = 13.0;       // usual time constant
    double tau_scatter = 0.06;      // standard deviation of its logarithm, from closing to closing
    double tail_share = 0.18;       // slow_tail: share of the lift
    double tail_factor = 4.0;       // slow_tail: its time constant over the main one
    double actuator_delay_s = 0.0;  // command to first movement
    bool smooth_travel = false;     // false: constant rate; true: eased at both ends
    double angle_closed_rad = 0.0;
    double angle_open_rad = 0.9;
};

// ---- surroundings ----

struct Segment {
    double length_m = 100.0;
    double curvature_pm = 0.0;  // positive to the left, 0 straight
    bool flap_allowed = false;  // the driver opens the flap here
};

struct Kerb {
    double distance_m = 0.0;  // lap distance of its beginning
    double length_m = 1.5;
    double height_m = 0.012;
    bool left = true;  // under the left wheels, else the right ones
};

struct CircuitParameters {
    std::string name = "Ring";
    std::vector<Segment> segments;
    std::vector<Kerb> kerbs;
    double transition_m = 12.0;  // curvature follows the segments with this length constant
    double elevation_m = 0.0;    // amplitude
    int elevation_waves = 2;     // hills in a lap
};

struct RoadParameters {
    double roughness_m3 = 2e-6;  // ISO 8608 Gd(n0) at n0 = 0.1 cycles/m
    double left_right_correlation = 0.6;
    double repeat_share = 0.6;     // of the variance that comes again every lap; the rest is the line's
    double longest_wave_m = 80.0;  // leak: longer waves are elevation
    double patch_m = 0.08;         // the tyre's contact patch smooths with this length
};

struct AirParameters {
    double temperature_k = 297.15;
    double pressure_pa = 100300.0;
    double relative_humidity = 0.48;
    double wind_mps = 2.0;
    double wind_from_rad = 0.8;  // clockwise from north, where it comes from
    double gust_sd_mps = 0.5;    // along x, first order
    double gust_time_s = 1.5;
};

// ---- driver ----

struct DriverParameters {
    double power_w = 620e3;
    double drive_limit_n = 11000.0;
    double engine_braking_n = 300.0;
    double grip = 1.55;  // friction of the tyres, cornering
    double braking_grip = 1.60;
    double braking_limit_mps2 = 54.0;  // by brakes and drag together
    double lateral_limit_mps2 = 28.0;
    double brake_gain_nppa = 4.6e-3;  // braking force at the road by line pressure
    double brake_rise_s = 0.14;
    double brake_point_sd_m = 2.5;  // from lap to lap
    double lift_s = 0.0;            // throttle shut this long before the brakes: coasting
    double throttle_rise_s = 0.35;
    std::vector<double> shift_speeds_mps{26.0, 36.0, 46.0, 56.0, 67.0, 79.0};
    double shift_time_s = 0.03;     // drive cut
    double start_speed_mps = 16.7;  // held for roll_out_s before the first lap is driven in earnest
    double roll_out_s = 6.0;
    double flap_wait_s = 0.9;  // full throttle before the flap is opened
    double flap_wait_sd_s = 0.2;
    double closing_time_least_s = 0.03;  // travel of the flap; drawn for each closing
    double closing_time_most_s = 0.12;
    double gap_least_s = 0.06;  // from flap shut to brake onset; drawn for each closing
    double gap_most_s = 0.33;
    double slow_probability = 0.15;  // a closing's time constant is multiplied by slow_least..slow_most
    double slow_least = 2.0;
    double slow_most = 3.5;
    double part_probability = 0.0;  // a closing settles short of whole
    double part_least = 0.6;        // plateau
    double part_most = 0.9;
    std::vector<double>
        zone_slow_probability;  // by braking zone (first is zone 1); where given, instead of the above
};

// A closing that is not left to chance. NaN keeps what is drawn.
struct PlannedClosing {
    int lap = 1;
    int zone = 1;
    double tau_factor = std::numeric_limits<double>::quiet_NaN();
    double plateau = std::numeric_limits<double>::quiet_NaN();
    double closing_time_s = std::numeric_limits<double>::quiet_NaN();
    double gap_s = std::numeric_limits<double>::quiet_NaN();
    bool keep_shut = false;  // the driver leaves the flap closed on this straight
};

}  // namespace holdfast::sim
