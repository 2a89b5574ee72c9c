// SPDX-License-Identifier: MIT
// Every Jacobian of the measurements against central differences.
#include "estimator/core/longitudinal_filter.hpp"
#include "estimator/core/measurements/accel_z.hpp"
#include "estimator/core/measurements/ride_height.hpp"
#include "tests/core/chassis_point.hpp"
#include "tests/core/jacobian.hpp"

using namespace holdfast::core;
using namespace holdfast::testing;

TEST_CASE("Jacobian of a ride height, seed 1") {
    const auto chassis = chassis_at_a_point(1);
    const RideHeightModel model{-1.9, kRoadRear};
    check_jacobian(chassis.filter().x, model.J_height_state(), chassis_scales(),
                   [&](const ChassisVector& x) { return model.predict(x); });
}

TEST_CASE("Jacobians of the vertical and the pitch acceleration, seeds 2 to 4") {
    const std::uint64_t seed = GENERATE(2, 3, 4);
    ChassisInput in = small_car_input();
    SECTION("driving, part of the flow away, wind not measured") {}
    SECTION("braking hard") {
        in.accel_x_mps2 = -45.0;
        in.transfer_force_n = -30000.0;
    }
    SECTION("air speed measured, flow attached") {
        in.air_speed_measured = true;
        in.missing = 0.0;
    }
    INFO("seed " << seed);
    const auto chassis = chassis_at_a_point(seed);
    auto there = chassis;
    there.predict(in);
    // The wind enters squared: a smaller step keeps the difference quotient's own error out.
    ChassisVector steps = chassis_scales();
    for (double& step : steps) step *= 0.01;
    const auto moved = [&](const ChassisVector& x) {
        auto other = chassis;
        other.filter().x = x;
        other.predict(in);
        return other.last_step();
    };
    check_jacobian(chassis.filter().x, AccelZModel::J_accel_state(there.last_step()), steps,
                   [&](const ChassisVector& x) { return AccelZModel::predict(x, moved(x)); });
    check_jacobian(chassis.filter().x, there.last_step().pitch_accel_by_state, steps,
                   [&](const ChassisVector& x) {
                       auto other = chassis;
                       other.filter().x = x;
                       other.predict(in);
                       return (other.filter().x[kPitchRate] - x[kPitchRate]) / in.dt_s;
                   });
}

TEST_CASE("accelerations for a missing area: the flap's rear area with its front share") {
    const auto chassis = chassis_at_a_point(5);
    ChassisInput in = small_car_input();
    const auto heave_at = [&](double missing) {
        auto other = chassis;
        in.missing = missing;
        other.predict(in);
        return other.last_step().heave_accel_mps2;
    };
    auto there = chassis;
    there.predict(in);
    const double per_area = there.last_step().heave_accel_per_missing_area;
    const double flap_m2 = chassis.filter().x[kFlapAreaRear];
    CHECK((heave_at(0.8) - heave_at(0.3)) / (0.5 * flap_m2) == Approx(per_area).epsilon(1e-9));
}

TEST_CASE("Jacobian of the measured speed: slip by driving or braking") {
    const double force_in_weights = GENERATE(-3.5, -0.4, 0.0, 0.7);
    LongitudinalFilter::Filter::Vector x{};
    x[kSpeed] = 71.0;
    x[kSlipDrive] = 0.006;
    x[kSlipBrake] = 0.003;
    LongitudinalFilter::Filter::Vector steps;
    steps.fill(1e-3);
    check_jacobian(x, LongitudinalFilter::J_speed_state(x, force_in_weights), steps, [&](const auto& at) {
        return at[kSpeed] * (1.0 + at[force_in_weights >= 0.0 ? kSlipDrive : kSlipBrake] * force_in_weights);
    });
}

TEST_CASE("Jacobian of the drag balance is that of [drag-balance] where the sensors' errors are none") {
    LongitudinalFilter::DragInput in;
    in.drive_force_n = 5200.0;
    in.accel_x_mps2 = 1.3;
    in.speed_mps = 75.0;
    in.dynamic_pressure_pa = 3300.0;
    in.dh_front_m = -0.011;
    in.dh_rear_m = -0.019;
    in.missing = 0.7;
    in.mass_kg = 778.0;
    LongitudinalFilter::Filter::Vector x{};
    x[kSpeed] = 75.0;
    x[kDragArea] = 1.2;
    x[kDragFlap] = 0.2;
    x[kDragSlopeFront] = 1.0;
    x[kDragSlopeRear] = -2.0;
    x[kWindUnseen] = -2.5;
    LongitudinalFilter::Filter::Vector steps;
    steps.fill(1e-4);
    // The air's force less F / (1 + gain) - M (true acceleration) - rolling: zero where all is right.
    const auto remainder = [&](const auto& at) {
        const double area = at[kDragArea] + at[kDragSlopeFront] * in.dh_front_m +
                            at[kDragSlopeRear] * in.dh_rear_m - at[kDragFlap] * in.missing;
        const double accel = (in.accel_x_mps2 - at[kAccelOffset]) * (1.0 - at[kAccelGain]);
        const double air_share = 1.0 + at[kWindUnseen] / in.speed_mps;
        return in.dynamic_pressure_pa * air_share * air_share * area -
               in.drive_force_n / (1.0 + at[kDriveGain]) + in.mass_kg * accel;
    };
    check_jacobian(x, LongitudinalFilter::J_drag_state(x, in), steps, remainder);
}
