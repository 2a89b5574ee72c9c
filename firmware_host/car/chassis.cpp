// SPDX-License-Identifier: MIT
#include "firmware_host/car/chassis.hpp"

#include <algorithm>
#include <cmath>

namespace holdfast::sim {

double bump_stop_force(const AxleParameters& axle, double compression_m) {
    const double into_m = compression_m - axle.bump_stop_gap_m;
    if (into_m <= 0.0) return 0.0;
    return into_m * (axle.bump_stop_rate_npm + 0.5 * axle.bump_stop_growth_npm2 * into_m);
}

double damper_force(const AxleParameters& axle, double compression_rate_mps) {
    const double slow = compression_rate_mps > 0.0 ? axle.damping_bump_nspm : axle.damping_rebound_nspm;
    const double over_knee = std::abs(compression_rate_mps) / axle.damping_knee_mps;
    const double share = axle.damping_fast_share + (1.0 - axle.damping_fast_share) / (1.0 + over_knee);
    return slow * share * compression_rate_mps;
}

Chassis::Chassis(const ChassisParameters& p) : parameters_(p) {
    const double unsprung_kg = 2.0 * (p.front.unsprung_mass_kg + p.rear.unsprung_mass_kg);
    sprung_mass_kg_ = p.mass_kg - unsprung_kg;
    const double front_sprung_kg = p.mass_kg * p.front_weight_share - 2.0 * p.front.unsprung_mass_kg;
    const double rear_sprung_kg = sprung_mass_kg_ - front_sprung_kg;
    front_to_cg_m_ = p.wheelbase_m * rear_sprung_kg / sprung_mass_kg_;
    for (std::size_t i = 0; i < kCorners; ++i) {
        const bool front = i < kRearLeft;
        const bool left = i % 2 == 0;
        const double sprung_n = 0.5 * kGravity * (front ? front_sprung_kg : rear_sprung_kg);
        wheels_[i] = Wheel{front ? front_to_cg_m_ : front_to_cg_m_ - p.wheelbase_m,
                           (left ? 0.5 : -0.5) * axle(i).track_m, sprung_n,
                           sprung_n + kGravity * axle(i).unsprung_mass_kg};
        suspension_n_[i] = sprung_n;
        tyre_n_[i] = wheels_[i].tyre_static_n;
    }
}

double Chassis::tyre_force_n(std::size_t corner, double road_m, double growth_m, double dt_s) {
    Wheel& wheel = wheels_[corner];
    const AxleParameters& a = axle(corner);
    const double road_rate = wheel.road_known ? (road_m - wheel.road_before_m) / dt_s : 0.0;
    wheel.road_before_m = road_m;
    wheel.road_known = true;
    const double squeeze_m = road_m + growth_m - wheel.height_m;
    const double force = wheel.tyre_static_n + a.tyre_rate_npm * squeeze_m +
                         a.tyre_damping_nspm * (road_rate - wheel.rate_mps);
    return std::max(0.0, force);  // the wheel may leave the road; the road never pulls
}

void Chassis::step(const ChassisInput& in, double dt_s) {
    const double sprung_kg = sprung_mass_kg_ - burnt_kg_;
    const double growth_m = parameters_.tyre_growth_s2pm * in.speed_mps * in.speed_mps;
    // Longitudinal transfer of the whole car between the axles; the links carry their share past the springs.
    const double pitching_nm =
        -mass_kg() * parameters_.cg_height_m * (in.accel_x_mps2 + in.gravity_mps2 * in.grade);
    const double transfer_n = pitching_nm / parameters_.wheelbase_m;  // on to the front, positive in braking
    const bool braking = in.accel_x_mps2 < 0.0;
    const double links_front_n = braking ? parameters_.front.anti_brake_share * transfer_n : 0.0;
    const double links_rear_n =
        -(braking ? parameters_.rear.anti_brake_share : parameters_.rear.anti_squat_share) * transfer_n;

    double force_up_n = -sprung_kg * in.gravity_mps2 - in.downforce_front_n - in.downforce_rear_n;
    double nose_down_nm = pitching_nm + wheels_[kFrontLeft].x_m * in.downforce_front_n +
                          wheels_[kRearLeft].x_m * in.downforce_rear_n;
    double left_up_nm = mass_kg() * parameters_.cg_height_m * in.accel_y_mps2;
    for (std::size_t first = 0; first < kCorners; first += 2) {
        const AxleParameters& a = axle(first);
        const double link_n = 0.5 * (first == 0 ? links_front_n : links_rear_n);
        // Lateral transfer through the links: the axle's share of the side force at its roll centre's height.
        const double axle_kg =
            mass_kg() * (first == 0 ? parameters_.front_weight_share : 1.0 - parameters_.front_weight_share);
        const double lateral_n = axle_kg * in.accel_y_mps2 * a.roll_centre_m / a.track_m;
        double compression_m[2];
        for (std::size_t side = 0; side < 2; ++side) {
            const Wheel& wheel = wheels_[first + side];
            compression_m[side] = wheel.height_m - body_height_m(wheel);
        }
        const double twist_n = 0.5 * a.anti_roll_rate_npm * (compression_m[0] - compression_m[1]);
        for (std::size_t side = 0; side < 2; ++side) {
            Wheel& wheel = wheels_[first + side];
            const double sign = side == 0 ? 1.0 : -1.0;
            const double suspension_n = wheel.sprung_static_n + a.wheel_rate_npm * compression_m[side] +
                                        bump_stop_force(a, compression_m[side]) +
                                        damper_force(a, wheel.rate_mps - body_rate_mps(wheel)) +
                                        sign * twist_n;
            const double to_body_n = suspension_n + link_n - sign * lateral_n;
            const double tyre_n = tyre_force_n(first + side, in.road_m[first + side], growth_m, dt_s);
            suspension_n_[first + side] = suspension_n;
            tyre_n_[first + side] = tyre_n;
            force_up_n += to_body_n;
            nose_down_nm -= wheel.x_m * to_body_n;
            left_up_nm += wheel.y_m * to_body_n;
            wheel.rate_mps += dt_s * ((tyre_n - to_body_n) / a.unsprung_mass_kg - in.gravity_mps2);
        }
    }
    const double accel_mps2 = force_up_n / sprung_kg;
    accel_z_mps2_ = accel_mps2 + in.gravity_mps2;
    heave_rate_mps_ += dt_s * accel_mps2;
    pitch_rate_radps_ += dt_s * nose_down_nm / parameters_.pitch_inertia_kgm2;
    roll_rate_radps_ += dt_s * left_up_nm / parameters_.roll_inertia_kgm2;
    heave_m_ += dt_s * heave_rate_mps_;
    pitch_rad_ += dt_s * pitch_rate_radps_;
    roll_rad_ += dt_s * roll_rate_radps_;
    for (Wheel& wheel : wheels_) wheel.height_m += dt_s * wheel.rate_mps;
}

double Chassis::rise_m(double x_m, double y_m) const {
    return heave_m_ - (front_to_cg_m_ + x_m) * pitch_rad_ + y_m * roll_rad_;
}

double Chassis::energy_j() const {
    double energy = 0.5 * (sprung_mass_kg_ - burnt_kg_) * heave_rate_mps_ * heave_rate_mps_ +
                    0.5 * parameters_.pitch_inertia_kgm2 * pitch_rate_radps_ * pitch_rate_radps_ +
                    0.5 * parameters_.roll_inertia_kgm2 * roll_rate_radps_ * roll_rate_radps_;
    for (std::size_t i = 0; i < kCorners; ++i) {
        const AxleParameters& a = axle(i);
        const Wheel& wheel = wheels_[i];
        const Wheel& other = wheels_[i ^ 1U];
        const double compression_m = wheel.height_m - body_height_m(wheel);
        const double twist_m = compression_m - (other.height_m - body_height_m(other));
        energy += 0.5 * a.unsprung_mass_kg * wheel.rate_mps * wheel.rate_mps +
                  0.5 * a.wheel_rate_npm * compression_m * compression_m +
                  0.5 * a.tyre_rate_npm * wheel.height_m * wheel.height_m +
                  0.125 * a.anti_roll_rate_npm * twist_m * twist_m;
    }
    return energy;
}

}  // namespace holdfast::sim
