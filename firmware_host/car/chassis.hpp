// SPDX-License-Identifier: MIT
// The true chassis: sprung mass in heave, pitch and roll on four springs, bump stops, dampers and anti-roll
// bars; four unsprung masses on tyres. Everything is relative to the car at rest on a level road.
#pragma once

#include <array>

#include "firmware_host/car/parameters.hpp"

namespace holdfast::sim {

enum Corner : std::size_t { kFrontLeft, kFrontRight, kRearLeft, kRearRight, kCorners };

struct ChassisInput {
    double speed_mps = 0.0;
    double accel_x_mps2 = 0.0;  // kinematic
    double accel_y_mps2 = 0.0;
    double gravity_mps2 = kGravity;  // with what crests take off and dips add
    double grade = 0.0;              // slope of the road, positive uphill
    double downforce_front_n = 0.0;  // at the axle lines
    double downforce_rear_n = 0.0;
    std::array<double, kCorners> road_m{};
};

// Force of a corner's bump stop, N, at a compression from rest.
[[nodiscard]] double bump_stop_force(const AxleParameters& axle, double compression_m);
// Force of a corner's damper, N; compression positive.
[[nodiscard]] double damper_force(const AxleParameters& axle, double compression_rate_mps);

class Chassis {
  public:
    explicit Chassis(const ChassisParameters& parameters);

    void burn_fuel(double burnt_since_start_kg) { burnt_kg_ = burnt_since_start_kg; }

    // Semi-implicit Euler: rates first, then positions by the new rates. Stable while dt times the wheel-hop
    // frequency stays well under 2.
    void step(const ChassisInput& input, double dt_s);

    [[nodiscard]] double mass_kg() const { return parameters_.mass_kg - burnt_kg_; }
    [[nodiscard]] double heave_m() const { return heave_m_; }  // of the sprung centre of gravity
    [[nodiscard]] double pitch_rad() const { return pitch_rad_; }
    [[nodiscard]] double roll_rad() const { return roll_rad_; }
    // Acceleration of the sprung centre of gravity as an accelerometer feels it: gravity's share is in it.
    [[nodiscard]] double accel_z_mps2() const { return accel_z_mps2_; }
    // Rise of a point of the body, x from the front axle line forward, y left.
    [[nodiscard]] double rise_m(double x_m, double y_m) const;
    // Spring, bump stop, damper and anti-roll bar.
    [[nodiscard]] double suspension_load_n(Corner corner) const { return suspension_n_[corner]; }
    [[nodiscard]] double tyre_load_n(Corner corner) const { return tyre_n_[corner]; }
    // Kinetic and spring energy relative to rest, J; for tests of the integrator.
    [[nodiscard]] double energy_j() const;

  private:
    struct Wheel {
        double x_m;  // from the sprung centre of gravity
        double y_m;
        double sprung_static_n;  // suspension load at rest
        double tyre_static_n;
        double height_m = 0.0;  // of the unsprung mass
        double rate_mps = 0.0;
        double road_before_m = 0.0;
        bool road_known = false;
    };
    [[nodiscard]] const AxleParameters& axle(std::size_t corner) const {
        return corner < kRearLeft ? parameters_.front : parameters_.rear;
    }
    [[nodiscard]] double body_height_m(const Wheel& wheel) const {
        return heave_m_ - wheel.x_m * pitch_rad_ + wheel.y_m * roll_rad_;
    }
    [[nodiscard]] double body_rate_mps(const Wheel& wheel) const {
        return heave_rate_mps_ - wheel.x_m * pitch_rate_radps_ + wheel.y_m * roll_rate_radps_;
    }
    [[nodiscard]] double tyre_force_n(std::size_t corner, double road_m, double growth_m, double dt_s);

    ChassisParameters parameters_;
    double sprung_mass_kg_;  // at the start
    double front_to_cg_m_;   // sprung centre of gravity behind the front axle
    double burnt_kg_ = 0.0;
    std::array<Wheel, kCorners> wheels_;
    std::array<double, kCorners> suspension_n_{};
    std::array<double, kCorners> tyre_n_{};
    double heave_m_ = 0.0;
    double heave_rate_mps_ = 0.0;
    double pitch_rad_ = 0.0;
    double pitch_rate_radps_ = 0.0;
    double roll_rad_ = 0.0;
    double roll_rate_radps_ = 0.0;
    double accel_z_mps2_ = kGravity;
};

}  // namespace holdfast::sim
