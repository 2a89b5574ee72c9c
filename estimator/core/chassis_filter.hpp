// SPDX-License-Identifier: MIT
// The vertical filter: heave and pitch of the sprung mass driven by the measured suspension loads, the road
// under each axle, downforce areas, flap size, load offsets and transfer errors. The measured loads enter as
// forces, so that neither springs nor dampers nor unsprung masses have to be known; the ride heights are the
// measurements. Derivation with equation labels: estimator/core/MODEL.md.
#pragma once

#include <array>

#include "estimator/core/car.hpp"
#include "estimator/core/chassis_state.hpp"
#include "estimator/core/ud_filter.hpp"

namespace holdfast::core {

// Constants of the sprung mass that follow from the car file.
struct ChassisConstants {
    explicit ChassisConstants(const Car& car);

    double sprung_mass_kg;  // at the start of the outing
    double weight_front_n;  // sprung weight on the front springs at rest
    double weight_rear_n;
    double weight_sd_front_n;  // from the car file's uncertainties
    double weight_sd_rear_n;
    double cg_to_front_m;  // sprung centre of gravity to the front axle, along x
    double cg_to_rear_m;
    double pitch_inertia_kgm2;
    double transfer_per_accel_kg;  // load transfer through springs and links per m/s^2 of acceleration
    double link_per_force;         // load transfer per newton of tyre force along x
    double transfer_sd;            // relative
    double anti_dive;
    double anti_lift;
    double anti_squat;
};

// What the sensors other than the ride heights say of one step.
struct ChassisInput {
    double dt_s = 0.0;
    double load_front_n = 0.0;  // sum of the axle's two suspension loads, mean over the step
    double load_rear_n = 0.0;
    double load_noise_front_n2s = 0.0;  // spectral density of the axle load's noise, two-sided, N^2 s
    double load_noise_rear_n2s = 0.0;
    double dynamic_pressure_pa = 0.0;  // before the wind states
    double speed_mps = 0.0;
    double course_rad = 0.0;          // clockwise; turns the wind about the car; 0 where it is not known
    bool air_speed_measured = false;  // the dynamic pressure has the wind in it already
    double dh_front_m = 0.0;          // ride height less its static value: the areas depend on it
    double dh_rear_m = 0.0;
    double accel_x_mps2 = 0.0;
    double transfer_force_n = 0.0;  // along x, what the links carry their shares of; brakes negative
    double fuel_burnt_kg = 0.0;
    double missing = 0.0;  // share of the flap's downforce that is away, 0..1, as the base path takes it
    double road_front_m2ps = 0.0;  // spectral density of the road's vertical velocity, two-sided, m^2/s
    double road_rear_m2ps = 0.0;
};

// The step's linear map, kept for those who carry deviations beside the estimate (the reattachment bank).
struct ChassisStep {
    double dt_s = 0.0;
    std::array<double, kChassisCount>
        heave_accel_by_state{};  // d(heave acceleration)/d(state), m/s^2 per unit
    std::array<double, kChassisCount> pitch_accel_by_state{};  // rad/s^2 per unit
    double heave_accel_mps2 = 0.0;                             // of the estimate itself
    double heave_accel_per_missing_area =
        0.0;  // m/s^2 for 1 m^2 missing at the rear (front's share included)
    double pitch_accel_per_missing_area = 0.0;
};

inline constexpr double kDriftEvery_s = 0.02;  // how often drift() is to be called

class ChassisFilter {
  public:
    using Filter = UdFilter<double, kChassisCount>;

    explicit ChassisFilter(const Car& car);

    void predict(const ChassisInput& input);

    // Slow change of areas, offsets and wind over elapsed_s.
    // unseen_turn_radps: rate at which the car turns in the wind without the course being known; 0 where it
    // is.
    struct Kept {  // by what the wind states were multiplied
        double gust = 1.0;
        double wind_along = 1.0;
    };
    Kept drift(double elapsed_s, bool air_speed_measured, double unseen_turn_radps);

    // The air speed is measured after all: the wind states go, the gust state becomes the pitot's gain error.
    void wind_is_measured();
    // The air speed is not measured any more: wind and gusts as before the first sample.
    void wind_is_unknown();
    // True over taken dynamic pressure, [wind]; that of the newest predict().
    [[nodiscard]] double wind_factor() const { return wind_factor_; }
    // Derivatives of wind_factor() with the wind states, 1/(m/s).
    [[nodiscard]] double wind_factor_per_along() const { return factor_per_along_; }
    [[nodiscard]] double wind_factor_per_across() const { return factor_per_across_; }
    // Wind against the car as estimated, m/s; 0 where the air speed is measured.
    [[nodiscard]] double headwind_mps() const { return headwind_mps_; }
    // Forget the motion, keep what was learned of the car: after a gap in the data. Heights against static,
    // m.
    void restart_motion(double dh_front_m, double dh_rear_m, double x_front_m, double x_rear_m);

    [[nodiscard]] const ChassisStep& last_step() const { return step_; }
    [[nodiscard]] const ChassisConstants& constants() const { return constants_; }
    [[nodiscard]] Filter& filter() { return filter_; }
    [[nodiscard]] const Filter& filter() const { return filter_; }

    // Areas at these ride heights (against static), flap closed and flow attached, [height], m^2.
    [[nodiscard]] double front_area_m2(double dh_m) const;
    [[nodiscard]] double rear_area_m2(double dh_m) const;

  private:
    ChassisConstants constants_;
    Filter filter_;
    ChassisStep step_;
    double wind_factor_ = 1.0;
    double headwind_mps_ = 0.0;
    double factor_per_along_ = 0.0, factor_per_across_ = 0.0;
};

}  // namespace holdfast::core
