// SPDX-License-Identifier: MIT
#include "firmware_host/car/driver.hpp"

#include <algorithm>
#include <cmath>

namespace holdfast::sim {
namespace {

// From one value to another with a first-order lag.
double follow(double value, double target, double dt_s, double time_constant_s) {
    return value + (target - value) * (1.0 - std::exp(-dt_s / time_constant_s));
}

constexpr double kSpeedGainPs = 8.0;  // deceleration asked for by speed over the plan, 1/s
constexpr double kLeastOpenS = 1.5;   // the flap is not opened for less than this before the brakes

}  // namespace

Driver::Driver(const Scenario& scenario, const Circuit& circuit, const Capability& car)
    : parameters_(scenario.driver),
      flap_(scenario.flap),
      planned_(scenario.planned),
      circuit_(circuit),
      plan_(circuit, scenario.driver, car),
      random_(scenario.seed, Stream::driver),
      flap_random_(scenario.seed, Stream::flap) {
    flap_wait_s_ = parameters_.flap_wait_s;
}

void Driver::step(const DriverView& view, double dt_s) {
    decide(view);
    work_flap(view, dt_s);
    work_throttle(view, dt_s);
    work_brakes(view, dt_s);
}

void Driver::decide(const DriverView& view) {
    const bool corner_here = circuit_.segment(view.lap_distance_m).curvature_pm != 0.0;
    switch (doing_) {
        case Doing::rolling_out:
            if (view.time_s >= parameters_.roll_out_s) {
                doing_ = Doing::full_throttle;
                plan_straight(view);
            }
            break;
        case Doing::full_throttle:
        case Doing::lifting:
            if (in_corner_ && !corner_here)
                plan_straight(view);  // came out of a corner that needed no brakes
            in_corner_ = corner_here;
            if (brakes_within(0.0, view)) {
                braking_s_ = 0.0;
                doing_ = planned_braking_mps2(view) > 0.0 ? Doing::braking : Doing::cornering;
            } else if (parameters_.lift_s > 0.0 && brakes_within(parameters_.lift_s, view)) {
                doing_ = Doing::lifting;
            }
            break;
        case Doing::braking:
            in_corner_ = in_corner_ || corner_here;
            if (view.speed_mps <= limit_mps(view) + 0.3 && planned_braking_mps2(view) <= 0.0) {
                doing_ = Doing::cornering;
            }
            break;
        case Doing::cornering:
            in_corner_ = in_corner_ || corner_here;
            if (in_corner_ && planned_braking_mps2(view) > 0.0 && view.speed_mps > limit_mps(view)) {
                braking_s_ = 0.0;
                doing_ = Doing::braking;
            } else if (in_corner_ && !corner_here) {
                doing_ = Doing::full_throttle;
                in_corner_ = false;
                plan_straight(view);
            }
            break;
    }
}

double Driver::limit_mps(const DriverView& view) const {
    return plan_.limit_mps(view.lap_distance_m + std::max(0.0, brake_shift_m_));
}

// How hard the plan brakes here.
double Driver::planned_braking_mps2(const DriverView& view) const {
    const double ahead = view.lap_distance_m + std::max(0.0, brake_shift_m_);
    return std::max(0.0, plan_.limit_mps(ahead) - plan_.limit_mps(ahead + 1.0)) * view.speed_mps;
}

// What will be done on the straight that begins, and at its end.
void Driver::plan_straight(const DriverView& view) {
    const int zone = plan_.zone_ahead(view.lap_distance_m);
    full_throttle_s_ = 0.0;
    brake_shift_m_ = random_.normal(0.0, parameters_.brake_point_sd_m);
    flap_wait_s_ = std::max(0.1, random_.normal(parameters_.flap_wait_s, parameters_.flap_wait_sd_s));
    gap_s_ = random_.uniform(parameters_.gap_least_s, parameters_.gap_most_s);
    keep_shut_ = false;
    closed_here_ = false;
    draw_closing(zone);
    const int lap = view.lap + (plan_.zone_is_next_lap(view.lap_distance_m) ? 1 : 0);
    if (const PlannedClosing* plan = planned(lap, zone)) {
        if (!std::isnan(plan->gap_s)) gap_s_ = plan->gap_s;
        if (!std::isnan(plan->closing_time_s)) closing_.travel_s = plan->closing_time_s;
        if (!std::isnan(plan->plateau)) closing_.plateau = plan->plateau;
        if (!std::isnan(plan->tau_factor)) {
            closing_.tau_chords = flap_.tau_chords * plan->tau_factor;
            closing_.slow = plan->tau_factor > 1.6;
        }
        keep_shut_ = plan->keep_shut;
    }
}

void Driver::draw_closing(int zone) {
    const auto& by_zone = parameters_.zone_slow_probability;
    const bool zone_known = zone >= 1 && static_cast<std::size_t>(zone) <= by_zone.size();
    const double slow_probability =
        zone_known ? by_zone[static_cast<std::size_t>(zone - 1)] : parameters_.slow_probability;
    // Every number is drawn every time, so that one probability does not move all later closings.
    const bool slow = flap_random_.happens(slow_probability);
    const bool part = flap_random_.happens(parameters_.part_probability);
    const double slow_factor = flap_random_.uniform(parameters_.slow_least, parameters_.slow_most);
    const double plateau = flap_random_.uniform(parameters_.part_least, parameters_.part_most);
    const double scatter = std::exp(flap_.tau_scatter * flap_random_.normal());
    closing_.travel_s =
        flap_random_.uniform(parameters_.closing_time_least_s, parameters_.closing_time_most_s);
    closing_.tau_chords = flap_.tau_chords * scatter * (slow ? slow_factor : 1.0);
    closing_.plateau = part ? plateau : 1.0;
    closing_.slow = slow;
}

const PlannedClosing* Driver::planned(int lap, int zone) const {
    for (const PlannedClosing& plan : planned_) {
        if (plan.lap == lap && plan.zone == zone) return &plan;
    }
    return nullptr;
}

bool Driver::brakes_within(double seconds, const DriverView& view) const {
    const double speed = view.speed_mps + view.accel_mps2 * seconds;
    const double distance = 0.5 * (view.speed_mps + speed) * seconds;
    return speed > plan_.limit_mps(view.lap_distance_m + std::max(0.0, distance + brake_shift_m_));
}

void Driver::work_flap(const DriverView& view, double dt_s) {
    const double lead_s = flap_.actuator_delay_s + closing_.travel_s + gap_s_;
    if (controls_.flap_open) {
        if (doing_ != Doing::full_throttle || brakes_within(lead_s, view)) {
            controls_.flap_open = false;
            closed_here_ = true;
        }
        return;
    }
    const bool flat_out = doing_ == Doing::full_throttle && controls_.throttle >= 1.0;
    full_throttle_s_ = flat_out ? full_throttle_s_ + dt_s : 0.0;
    controls_.flap_open = full_throttle_s_ > flap_wait_s_ && !keep_shut_ && !closed_here_ &&
                          circuit_.segment(view.lap_distance_m).flap_allowed &&
                          clear_for(lead_s + kLeastOpenS, view);
}

bool Driver::clear_for(double seconds, const DriverView& view) const {
    constexpr double kLookS = 0.1;
    for (double t = 0.0; t < seconds; t += kLookS) {
        if (brakes_within(t, view)) return false;
    }
    return !brakes_within(seconds, view);
}

void Driver::work_throttle(const DriverView& view, double dt_s) {
    double asked = 0.0;
    const double full_n = full_drive_n(view);
    switch (doing_) {
        case Doing::full_throttle:
            asked = std::min(1.0, controls_.throttle + dt_s / parameters_.throttle_rise_s);
            break;
        case Doing::rolling_out:
        case Doing::cornering: {
            const double target = doing_ == Doing::rolling_out ? parameters_.start_speed_mps
                                                               : plan_.limit_mps(view.lap_distance_m);
            const double force = view.resistance_n + 2.0 * view.mass_kg * (target - view.speed_mps);
            asked = std::clamp(force / std::max(1.0, full_n), 0.0, 1.0);
            break;
        }
        case Doing::lifting:
        case Doing::braking:
            break;
    }
    constexpr double kFootS = 0.012;
    controls_.throttle =
        doing_ == Doing::full_throttle ? asked : follow(controls_.throttle, asked, dt_s, kFootS);
    shift(view);
    const bool cut = view.time_s < shift_until_s_;
    const double engine_n = -parameters_.engine_braking_n * std::min(1.0, view.speed_mps / 60.0);
    const double target_n = cut ? engine_n : engine_n + controls_.throttle * (full_n - engine_n);
    constexpr double kDriveLineS = 0.004;
    controls_.drive_force_n = follow(controls_.drive_force_n, target_n, dt_s, kDriveLineS);
}

double Driver::full_drive_n(const DriverView& view) const {
    // Power sags a little at both ends of a gear's range.
    const auto& speeds = parameters_.shift_speeds_mps;
    const double top = gear_ < speeds.size() ? speeds[gear_] : 1.2 * (speeds.empty() ? 90.0 : speeds.back());
    const double off_peak = (view.speed_mps / top - 0.93) / 0.25;
    const double power_w = parameters_.power_w * std::max(0.7, 1.0 - 0.06 * off_peak * off_peak);
    return std::min(
        {parameters_.drive_limit_n, view.traction_limit_n, power_w / std::max(5.0, view.speed_mps)});
}

void Driver::shift(const DriverView& view) {
    const auto& speeds = parameters_.shift_speeds_mps;
    if (doing_ == Doing::full_throttle && gear_ < speeds.size() && view.speed_mps > speeds[gear_]) {
        ++gear_;
        shift_until_s_ = view.time_s + parameters_.shift_time_s;
    }
    while (gear_ > 0 && view.speed_mps < 0.9 * speeds[gear_ - 1]) --gear_;
}

void Driver::work_brakes(const DriverView& view, double dt_s) {
    constexpr double kReleaseS = 0.015;
    if (doing_ != Doing::braking) {
        controls_.brake_pressure_pa = follow(controls_.brake_pressure_pa, 0.0, dt_s, kReleaseS);
        if (controls_.brake_pressure_pa < 100.0) controls_.brake_pressure_pa = 0.0;
        return;
    }
    braking_s_ += dt_s;
    const double over_mps = view.speed_mps - limit_mps(view);
    const double asked_mps2 = std::clamp(planned_braking_mps2(view) + kSpeedGainPs * over_mps, 0.0,
                                         1.05 * plan_.braking_mps2(view.speed_mps));
    const double force_n = view.mass_kg * asked_mps2 - view.resistance_n + controls_.drive_force_n;
    const double risen = std::min(1.0, braking_s_ / parameters_.brake_rise_s);
    const double target_pa = risen * std::max(0.0, force_n) / parameters_.brake_gain_nppa;
    constexpr double kLegS = 0.008;
    controls_.brake_pressure_pa = follow(controls_.brake_pressure_pa, target_pa, dt_s, kLegS);
}

}  // namespace holdfast::sim
