// SPDX-License-Identifier: MIT
#include "tests/bench/accuracy/known_closing.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

namespace holdfast::bench {
namespace {

// What an estimator may know of a closing before it sees it: the flap's size from earlier openings; the start
// from the ranges that cars are drawn from (position of the flap, dead time; firmware_host/car/families.cpp).
constexpr double kFlapSdShare = 0.05;
constexpr double kStartSd_positions = 0.14 / 3.4641;  // uniform over 0.28..0.42
constexpr double kStartSd_chords = 2.0 / 3.4641;      // uniform over 2..4
constexpr double kDecelerationOver_s = 0.4;

core::Axle true_axle(const sim::AxleParameters& axle) {
    core::Axle out;
    out.track_m = axle.track_m;
    out.unsprung_mass_kg.value = axle.unsprung_mass_kg;
    return out;
}

core::Car true_car(const sim::Scenario& scenario) {
    const sim::ChassisParameters& chassis = scenario.chassis;
    core::Car car;
    car.mass_kg.value = chassis.mass_kg;
    car.wheelbase_m = chassis.wheelbase_m;
    car.front_weight_share.value = chassis.front_weight_share;
    car.cg_height_m.value = chassis.cg_height_m;
    car.pitch_inertia_kgm2.value = chassis.pitch_inertia_kgm2;
    car.front = true_axle(chassis.front);
    car.rear = true_axle(chassis.rear);
    car.ride_height_count = scenario.ride_heights.size();
    for (std::size_t i = 0; i < car.ride_height_count; ++i) {
        const sim::RideHeightPlace& place = scenario.ride_heights[i];
        car.ride_height[i].static_m.value = place.static_m;
        car.ride_height[i].x_m = place.x_m;
        car.ride_height[i].y_m = place.y_m;
    }
    return car;
}

// Variance of a sample, rounding included, times its interval.
double density(const sim::SensorParameters& sensor) {
    return (sensor.noise_sd * sensor.noise_sd + sensor.resolution * sensor.resolution / 12.0) /
           sensor.rate_hz;
}

// From this position on its way down the flap takes so long to shut.
double time_to_shut_s(const sim::FlapParameters& flap, double position, double travel_s) {
    const double moved = 1.0 - position;
    // Smoothstep 3m^2 - 2m^3 inverted.
    const double time = flap.smooth_travel ? 0.5 - std::sin(std::asin(1.0 - 2.0 * moved) / 3.0) : moved;
    return (1.0 - time) * travel_s;
}

const sim::TruthSample& at(const std::vector<sim::TruthSample>& truth, double time_s) {
    const auto later = std::lower_bound(truth.begin(), truth.end(), time_s,
                                        [](const auto& s, double t) { return s.time_s < t; });
    return later == truth.end() ? truth.back() : *later;
}

}  // namespace

std::optional<KnownClosing> known_closing(const sim::Outing& outing, const sim::TruthClosure& closure) {
    const sim::Scenario& scenario = outing.scenario();
    const sim::FlapParameters& flap = scenario.flap;
    if (flap.shape != sim::Reattachment::first_order || closure.plateau < 1.0) return std::nullopt;
    const sim::TruthSample& now = at(outing.truth(), closure.time_closed_s);
    KnownClosing out;
    out.car = true_car(scenario);
    out.speed_mps = now.air_speed_mps;
    out.air_density_kgpm3 = now.air_density_kgpm3;
    out.flap_rear_m2 = flap.area_m2;
    out.flap_front_m2 = -flap.area_m2 * flap.overhang_m / (scenario.chassis.wheelbase_m + flap.overhang_m);
    out.tau_s = closure.tau_s;
    out.start_s = closure.dead_s - time_to_shut_s(flap, flap.attach_position, closure.closing_time_s);
    out.brakes_s = std::numeric_limits<double>::infinity();
    if (!std::isnan(closure.time_brake_s)) {
        out.brakes_s = closure.time_brake_s - closure.time_closed_s;
        const double from_mps = at(outing.truth(), closure.time_brake_s).speed_mps;
        const double to_mps = at(outing.truth(), closure.time_brake_s + kDecelerationOver_s).speed_mps;
        out.braking_mps2 = std::max(from_mps - to_mps, 0.0) / kDecelerationOver_s;
    }
    out.step_s = 1.0 / scenario.frame_rate_hz;
    out.load_noise_n2s = 2.0 * density(scenario.sensors[index(Channel::load_rl)]);
    out.height_noise_m2s = density(scenario.sensors[index(ride_height_channel(0))]);
    const sim::SensorParameters& accel_z = scenario.sensors[index(Channel::accel_z)];
    if (accel_z.fitted) out.accel_z_noise_m2ps3 = density(accel_z);
    out.roughness_m3 = 0.5 * (1.0 + scenario.road.left_right_correlation) * scenario.road.roughness_m3;
    out.flap_sd_m2 = kFlapSdShare * flap.area_m2;
    out.start_sd_s = std::hypot(kStartSd_positions * closure.closing_time_s,
                                kStartSd_chords * flap.chord_m / now.air_speed_mps);
    return out;
}

}  // namespace holdfast::bench
