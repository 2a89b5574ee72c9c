// SPDX-License-Identifier: MIT
// The true chassis against statics, closed forms and conservation laws.
#include <catch2/catch.hpp>
#include <cmath>
#include <numbers>

#include "firmware_host/car/chassis.hpp"

namespace {

using namespace holdfast::sim;

constexpr double kStepS = 0.0005;

void settle(Chassis& chassis, const ChassisInput& input, double seconds = 5.0) {
    for (double t = 0.0; t < seconds; t += kStepS) chassis.step(input, kStepS);
}

double axle_suspension_n(const Chassis& chassis, bool front) {
    return front ? chassis.suspension_load_n(kFrontLeft) + chassis.suspension_load_n(kFrontRight)
                 : chassis.suspension_load_n(kRearLeft) + chassis.suspension_load_n(kRearRight);
}

double axle_tyre_n(const Chassis& chassis, bool front) {
    return front ? chassis.tyre_load_n(kFrontLeft) + chassis.tyre_load_n(kFrontRight)
                 : chassis.tyre_load_n(kRearLeft) + chassis.tyre_load_n(kRearRight);
}

ChassisParameters undamped() {
    ChassisParameters p;
    for (AxleParameters* axle : {&p.front, &p.rear}) {
        axle->damping_bump_nspm = axle->damping_rebound_nspm = axle->tyre_damping_nspm = 0.0;
        axle->bump_stop_gap_m = 1.0;
    }
    return p;
}

}  // namespace

TEST_CASE("at rest the suspension holds the sprung weight and the tyres the whole") {
    const ChassisParameters p;
    Chassis chassis(p);
    settle(chassis, {});
    const double front_n = p.mass_kg * p.front_weight_share * kGravity;
    const double rear_n = p.mass_kg * kGravity - front_n;
    CHECK(axle_tyre_n(chassis, true) == Approx(front_n).margin(1e-6));
    CHECK(axle_tyre_n(chassis, false) == Approx(rear_n).margin(1e-6));
    CHECK(axle_suspension_n(chassis, true) ==
          Approx(front_n - 2.0 * p.front.unsprung_mass_kg * kGravity).margin(1e-6));
    CHECK(axle_suspension_n(chassis, false) ==
          Approx(rear_n - 2.0 * p.rear.unsprung_mass_kg * kGravity).margin(1e-6));
    CHECK(chassis.heave_m() == Approx(0.0).margin(1e-9));
    CHECK(chassis.accel_z_mps2() == Approx(kGravity).margin(1e-6));
}

TEST_CASE("steady downforce at an axle arrives under that axle") {
    const ChassisParameters p;
    Chassis chassis(p);
    const double front_before = axle_tyre_n(chassis, true);
    const double rear_before = axle_tyre_n(chassis, false);
    const double front_load_before = axle_suspension_n(chassis, true);
    ChassisInput in;
    in.downforce_front_n = 7000.0;
    in.downforce_rear_n = 11000.0;
    settle(chassis, in);
    CHECK(axle_tyre_n(chassis, true) - front_before == Approx(7000.0).margin(0.01));
    CHECK(axle_tyre_n(chassis, false) - rear_before == Approx(11000.0).margin(0.01));
    CHECK(axle_suspension_n(chassis, true) - front_load_before == Approx(7000.0).margin(0.01));
}

TEST_CASE("braking moves m a h / L to the front; the links keep their share from the springs") {
    ChassisParameters p;
    p.front.anti_brake_share = 0.2;
    p.rear.anti_brake_share = 0.1;
    p.rear.anti_squat_share = 0.3;
    const double accel = GENERATE(-45.0, 9.0);
    CAPTURE(accel);
    Chassis chassis(p);
    const double tyre_before = axle_tyre_n(chassis, true);
    const double front_before = axle_suspension_n(chassis, true);
    const double rear_before = axle_suspension_n(chassis, false);
    ChassisInput in;
    in.accel_x_mps2 = accel;
    settle(chassis, in);
    const double transfer = -p.mass_kg * accel * p.cg_height_m / p.wheelbase_m;
    CHECK(axle_tyre_n(chassis, true) - tyre_before == Approx(transfer).margin(0.05));
    const double front_share = accel < 0.0 ? 0.8 : 1.0;
    const double rear_share = accel < 0.0 ? 0.9 : 0.7;
    CHECK(axle_suspension_n(chassis, true) - front_before == Approx(front_share * transfer).margin(0.05));
    CHECK(axle_suspension_n(chassis, false) - rear_before == Approx(-rear_share * transfer).margin(0.05));
    CHECK((chassis.pitch_rad() > 0.0) == (accel < 0.0));  // ISO 8855: nose down is positive
}

TEST_CASE("a left turn loads the right tyres by m a h in all and lifts the left side") {
    const ChassisParameters p;
    Chassis chassis(p);
    ChassisInput in;
    in.accel_y_mps2 = 12.0;
    settle(chassis, in);
    const double front_nm =
        0.5 * p.front.track_m * (chassis.tyre_load_n(kFrontRight) - chassis.tyre_load_n(kFrontLeft));
    const double rear_nm =
        0.5 * p.rear.track_m * (chassis.tyre_load_n(kRearRight) - chassis.tyre_load_n(kRearLeft));
    CHECK(front_nm + rear_nm == Approx(p.mass_kg * 12.0 * p.cg_height_m).epsilon(1e-4));
    // The springs are spared what passes through the roll centres.
    const double springs_nm =
        0.5 * p.front.track_m *
            (chassis.suspension_load_n(kFrontRight) - chassis.suspension_load_n(kFrontLeft)) +
        0.5 * p.rear.track_m * (chassis.suspension_load_n(kRearRight) - chassis.suspension_load_n(kRearLeft));
    const double links_nm =
        p.mass_kg * 12.0 *
        (p.front_weight_share * p.front.roll_centre_m + (1.0 - p.front_weight_share) * p.rear.roll_centre_m);
    CHECK(springs_nm == Approx(front_nm + rear_nm - links_nm).epsilon(1e-4));
    CHECK(chassis.roll_rad() > 0.0);
}

TEST_CASE("an anti-roll bar adds its rate to the corner in roll and nothing in heave") {
    ChassisParameters soft;
    soft.front.anti_roll_rate_npm = 0.0;
    ChassisParameters stiff = soft;
    stiff.front.anti_roll_rate_npm = 80e3;
    Chassis a(soft);
    Chassis b(stiff);
    ChassisInput in;
    in.downforce_front_n = 5000.0;
    settle(a, in);
    settle(b, in);
    CHECK(a.heave_m() == Approx(b.heave_m()).margin(1e-9));
    in.accel_y_mps2 = 8.0;
    settle(b, in);
    const double twist_n = 0.5 * (b.suspension_load_n(kFrontRight) - b.suspension_load_n(kFrontLeft));
    // Compression of one corner in roll: body against wheel, the wheel being lower by what its tyre gives.
    const double tyre_n = 0.5 * (b.tyre_load_n(kFrontRight) - b.tyre_load_n(kFrontLeft));
    const double compression_m =
        0.5 * stiff.front.track_m * b.roll_rad() - tyre_n / stiff.front.tyre_rate_npm;
    CHECK(twist_n == Approx((stiff.front.wheel_rate_npm + 80e3) * compression_m).epsilon(1e-3));
}

TEST_CASE("tyres grow with the square of speed and lift the car") {
    const ChassisParameters p;
    Chassis chassis(p);
    ChassisInput in;
    in.speed_mps = 80.0;
    settle(chassis, in);
    CHECK(chassis.heave_m() == Approx(p.tyre_growth_s2pm * 6400.0).margin(1e-7));
}

TEST_CASE("burnt fuel takes its weight off the tyres") {
    const ChassisParameters p;
    Chassis chassis(p);
    chassis.burn_fuel(30.0);
    settle(chassis, {});
    CHECK(axle_tyre_n(chassis, true) + axle_tyre_n(chassis, false) ==
          Approx((p.mass_kg - 30.0) * kGravity).margin(1e-5));
}

TEST_CASE("without dampers the integrator keeps the energy") {
    Chassis chassis(undamped());
    ChassisInput push;
    push.downforce_front_n = 1500.0;
    push.downforce_rear_n = 2500.0;
    for (double t = 0.0; t < 0.1; t += kStepS) chassis.step(push, kStepS);
    double first = 0.0;
    double last = 0.0;
    constexpr int kSteps = 40000;  // 20 s
    for (int i = 0; i < kSteps; ++i) {
        chassis.step({}, kStepS);
        // Averaged over 2 s: a semi-implicit step's energy ripples within a cycle but must not drift.
        if (i < kSteps / 10) first += chassis.energy_j();
        if (i >= 9 * kSteps / 10) last += chassis.energy_j();
    }
    CHECK(first > 0.0);
    CHECK(last == Approx(first).epsilon(0.01));
}

TEST_CASE("heave and wheel hop of a symmetric car have the closed-form frequencies") {
    ChassisParameters p = undamped();
    p.front_weight_share = 0.5;
    p.rear = p.front;
    Chassis chassis(p);
    // A quarter of the car: sprung m on k, unsprung u on tyre t. omega^2 are the roots of
    // m u w^2 - (m (k + t) + u k) w + k t = 0.
    const double u = p.front.unsprung_mass_kg;
    const double m = 0.25 * p.mass_kg - u;
    const double k = p.front.wheel_rate_npm;
    const double t = p.front.tyre_rate_npm;
    const double b = m * (k + t) + u * k;
    const double slow = std::sqrt((b - std::sqrt(b * b - 4.0 * m * u * k * t)) / (2.0 * m * u));
    // Pushed slowly, so that only the slow mode moves; counted by its crossings of zero.
    ChassisInput push;
    for (double s = 0.0; s < 1.0; s += kStepS) {
        push.downforce_front_n = push.downforce_rear_n = 2000.0 * s;
        chassis.step(push, kStepS);
    }
    double first_s = -1.0;
    double last_s = -1.0;
    int crossings = 0;
    double before = chassis.heave_m();
    for (int i = 0; i < 20000; ++i) {
        chassis.step({}, kStepS);
        const double now = chassis.heave_m();
        if (before < 0.0 && now >= 0.0) {
            last_s = (i + before / (before - now)) * kStepS;
            if (first_s < 0.0) first_s = last_s;
            ++crossings;
        }
        before = now;
    }
    REQUIRE(crossings > 10);
    const double frequency_hz = (crossings - 1) / (last_s - first_s);
    CHECK(frequency_hz == Approx(slow / (2.0 * std::numbers::pi)).epsilon(0.005));
}

TEST_CASE("a wheel leaves the road rather than be pulled by it") {
    Chassis chassis(ChassisParameters{});
    ChassisInput in;
    in.road_m.fill(-0.05);  // a hole
    double least = 1e9;
    for (int i = 0; i < 100; ++i) {
        chassis.step(in, kStepS);
        for (const Corner c : {kFrontLeft, kFrontRight, kRearLeft, kRearRight}) {
            least = std::min(least, chassis.tyre_load_n(c));
        }
    }
    CHECK(least == 0.0);
}

TEST_CASE("bump stops stiffen with travel; dampers are digressive and firmer in rebound") {
    const AxleParameters axle;
    CHECK(bump_stop_force(axle, axle.bump_stop_gap_m) == 0.0);
    const double soft = bump_stop_force(axle, axle.bump_stop_gap_m + 0.001);
    const double hard = bump_stop_force(axle, axle.bump_stop_gap_m + 0.010);
    CHECK(soft > 0.0);
    CHECK(hard > 10.0 * soft);
    CHECK(damper_force(axle, 0.05) > 0.0);
    CHECK(-damper_force(axle, -0.05) > damper_force(axle, 0.05));
    CHECK(damper_force(axle, 0.4) < 4.0 * damper_force(axle, 0.1));
}
