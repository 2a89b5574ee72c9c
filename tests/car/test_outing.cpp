// SPDX-License-Identifier: MIT
// Whole outings: against closed forms on simple ones, and for what every outing has to keep.
#include <bit>
#include <catch2/catch.hpp>
#include <cmath>
#include <numbers>
#include <sstream>

#include "firmware_host/car/aero.hpp"
#include "firmware_host/car/outing.hpp"

namespace {

using namespace holdfast;
using namespace holdfast::sim;

// A straight, level, smooth road without wind, perfect sensors, and a car that never gets out of its first
// state.
Scenario straight_road(double speed_mps) {
    Scenario s = make_scenario("open_wheel-perfect-calm-smooth", 2);
    s.laps = 1;
    s.circuit.segments = {{20000.0, 0.0, false}};
    s.circuit.kerbs.clear();
    s.circuit.elevation_m = 0.0;
    s.road.roughness_m3 = 0.0;
    s.chassis.fuel_per_lap_kg = 0.0;
    s.chassis.vibration_mps2 = 0.0;
    s.driver.start_speed_mps = speed_mps;
    s.driver.roll_out_s = 1e9;
    return s;
}

void drive_to(Outing& outing, double time_s) {
    Frame frame;
    do {
        REQUIRE(outing.next(frame));
    } while (frame.time_s() < time_s - 1e-9);  // at least one frame
}

double load_n(const Outing& outing, Channel left) {
    return outing.true_values()[index(left)] + outing.true_values()[index(left) + 1];
}

}  // namespace

TEST_CASE("coasting down follows the closed form of F0 + F2 V^2") {
    // Form of SAE J2263 and ISO 10521-1 with F1 = 0: m 1500 kg, f0 150 N, f2 0.4 N s^2/m^2 from 30 m/s;
    // values computed from v(t) = sqrt(f0/f2) tan(atan(v0 sqrt(f2/f0)) - t sqrt(f0 f2)/m).
    Scenario s = straight_road(30.0);
    s.chassis.mass_kg = 1500.0;
    s.chassis.rolling_resistance = 150.0 / (1500.0 * kGravity);
    s.chassis.slip_drive_pn = 0.0;
    s.aero.front.area_m2 = s.aero.rear.area_m2 = 0.0;
    s.aero.front_per_pitch_m2prad = 0.0;
    s.aero.drag_per_downforce2 = 0.0;
    s.flap.drag_area_m2 = 0.0;
    s.aero.drag_base_m2 = 0.8 / air_density(s.air);
    s.driver.drive_limit_n = 0.0;
    s.driver.engine_braking_n = 0.0;
    Outing outing(s);
    drive_to(outing, 10.0);
    CHECK(outing.true_values()[index(Channel::speed)] == Approx(26.849258).margin(2e-4));
    drive_to(outing, 30.0);
    CHECK(outing.true_values()[index(Channel::speed)] == Approx(21.720693).margin(2e-4));
}

TEST_CASE("at steady speed the loads above rest are the downforce areas times dynamic pressure") {
    const double speed = GENERATE(30.0, 60.0, 80.0);
    Scenario s = straight_road(speed);
    s.driver.power_w = 2e6;
    const ChassisParameters& car = s.chassis;
    const double front_rest_n =
        kGravity * (car.mass_kg * car.front_weight_share - 2.0 * car.front.unsprung_mass_kg);
    const double rear_rest_n =
        kGravity * (car.mass_kg * (1.0 - car.front_weight_share) - 2.0 * car.rear.unsprung_mass_kg);
    Outing outing(s);
    drive_to(outing, 20.0);
    const TruthSample& truth = outing.truth().back();
    REQUIRE(truth.speed_mps == Approx(speed).epsilon(0.01));
    const double pressure_pa = 0.5 * truth.air_density_kgpm3 * truth.air_speed_mps * truth.air_speed_mps;
    CHECK(load_n(outing, Channel::load_fl) - front_rest_n ==
          Approx(pressure_pa * truth.cla_front_m2).margin(2.0));
    CHECK(load_n(outing, Channel::load_rl) - rear_rest_n ==
          Approx(pressure_pa * truth.cla_rear_m2).margin(2.0));
    CHECK(outing.true_values()[index(Channel::accel_x)] == Approx(0.0).margin(1e-3));
}

TEST_CASE("drive, brakes and resistance account for the car's momentum over a lap, seed 6") {
    Scenario s = make_scenario("open_wheel-perfect-calm", 6);
    s.laps = 1;
    s.chassis.vibration_mps2 = 0.0;
    s.chassis.fuel_per_lap_kg = 0.0;
    s.circuit.elevation_m = 0.0;
    const double mass_kg = s.chassis.mass_kg;
    Outing outing(s);
    Frame frame;
    double impulse_ns = 0.0;
    double braking_ns = 0.0;
    double worst_n = 0.0;
    while (outing.next(frame)) {
        if (outing.truth().empty() || frame.time_s() - outing.truth().back().time_s > 1e-6)
            continue;  // at 50 Hz
        const TruthSample& truth = outing.truth().back();
        const auto& now = outing.true_values();
        const double pressure_pa = 0.5 * truth.air_density_kgpm3 * truth.air_speed_mps * truth.air_speed_mps;
        const double downforce_n = pressure_pa * (truth.cla_front_m2 + truth.cla_rear_m2);
        const double brake_n = now[index(Channel::brake_pressure)] * s.driver.brake_gain_nppa;
        const double force_n = now[index(Channel::drive_force)] - brake_n - pressure_pa * truth.cda_m2 -
                               s.chassis.rolling_resistance * (mass_kg * kGravity + downforce_n);
        worst_n = std::max(worst_n, std::abs(force_n - mass_kg * now[index(Channel::accel_x)]));
        impulse_ns += 0.02 * force_n;
        braking_ns += 0.02 * brake_n;
    }
    const double momentum_ns = mass_kg * (outing.truth().back().speed_mps - s.driver.start_speed_mps);
    // The areas of the truth are one step of 0.5 ms later than the forces that made the acceleration.
    CHECK(worst_n < 120.0);
    CHECK(braking_ns > 100e3);
    CHECK(impulse_ns == Approx(momentum_ns).margin(0.005 * braking_ns));
}

TEST_CASE("course, yaw rate and side force belong together, and a lap turns once round, seed 6") {
    Scenario s = make_scenario("open_wheel-perfect-full", 6);
    s.laps = 1;
    Outing outing(s);
    Frame frame;
    double turned_rad = 0.0;
    double course_turned_rad = 0.0;
    double course_before_rad = 0.0;
    while (outing.next(frame)) {
        const auto& now = outing.true_values();
        const double yaw_rate = now[index(Channel::yaw_rate)];
        turned_rad += yaw_rate * 0.0025;
        course_turned_rad +=
            std::remainder(now[index(Channel::heading)] - course_before_rad, 2.0 * std::numbers::pi);
        course_before_rad = now[index(Channel::heading)];
        if (outing.truth().empty() || frame.time_s() - outing.truth().back().time_s > 1e-6) continue;
        REQUIRE(now[index(Channel::accel_y)] ==
                Approx(yaw_rate * outing.truth().back().speed_mps).margin(1e-9));
    }
    CHECK(turned_rad == Approx(2.0 * std::numbers::pi).margin(0.02));  // to the left
    CHECK(course_turned_rad == Approx(-turned_rad).margin(0.02));      // clockwise from north
}

TEST_CASE("wheels that drive turn faster than the road, wheels that brake slower") {
    Scenario s = make_scenario("open_wheel-perfect", 6);
    s.laps = 1;
    Outing outing(s);
    Frame frame;
    double driving = 0.0;
    double braking = 0.0;
    while (outing.next(frame)) {
        if (outing.truth().empty() || frame.time_s() - outing.truth().back().time_s > 1e-6) continue;
        const auto& now = outing.true_values();
        const double slip = now[index(Channel::speed)] / outing.truth().back().speed_mps - 1.0;
        driving = std::max(driving, slip);
        braking = std::min(braking, slip);
    }
    CHECK(driving == Approx(s.chassis.slip_drive_pn * s.driver.drive_limit_n).epsilon(0.1));
    CHECK(braking < -0.005);
    CHECK(braking > -0.02);
}

TEST_CASE("fuel goes by the distance and comes off the springs") {
    Scenario s = straight_road(30.0);
    s.chassis.fuel_per_lap_kg = 200.0;  // a lap is 20 km
    s.aero.front.area_m2 = s.aero.rear.area_m2 = 0.0;
    s.aero.front_per_pitch_m2prad = 0.0;
    Outing outing(s);
    drive_to(outing, 1.0);
    const double early_n = load_n(outing, Channel::load_fl) + load_n(outing, Channel::load_rl);
    drive_to(outing, 101.0);
    const double late_n = load_n(outing, Channel::load_fl) + load_n(outing, Channel::load_rl);
    CHECK(early_n - late_n == Approx(200.0 * 3000.0 / 20000.0 * kGravity).epsilon(0.01));
}

TEST_CASE("a ride height is measured to the road under its own sensor") {
    Scenario s = straight_road(16.0);
    s.circuit.kerbs = {{100.0, 100.0, 0.03, true}};  // the road slowly rises on the left and falls again
    s.ride_heights = {{"left", 0.08, 0.0, 0.5 * s.chassis.front.track_m},
                      {"right", 0.08, 0.0, -0.5 * s.chassis.front.track_m},
                      {"ahead", 0.08, 1.0, 0.5 * s.chassis.front.track_m}};
    s.sensors[index(ride_height_channel(2))] = s.sensors[index(ride_height_channel(0))];
    Outing outing(s);
    drive_to(outing, 3.0);
    const auto height = [&](std::size_t slot) {
        return outing.true_values()[index(ride_height_channel(slot))];
    };
    const double left_before = height(0);
    const double right_before = height(1);
    const double ahead_before = height(2);
    // At the top the car has tilted with the road: 30 mm on one side, and each side keeps its height.
    while (outing.true_values()[index(Channel::lap_distance)] < 150.0) drive_to(outing, 0.0);
    CHECK(height(0) == Approx(left_before).margin(0.004));
    CHECK(height(1) == Approx(right_before).margin(0.004));
    // On the way down the road a metre ahead lies lower by its slope; the body, on both sides, leans half as
    // much.
    while (outing.true_values()[index(Channel::lap_distance)] < 175.0) drive_to(outing, 0.0);
    const double slope = 0.015 * std::numbers::pi / 50.0;
    CHECK((height(2) - ahead_before) - (height(0) - left_before) == Approx(0.5 * slope).margin(0.2 * slope));
}

TEST_CASE("the same scenario gives the same bits, another seed gives others") {
    const auto fingerprint = [](std::uint64_t seed) {
        Scenario s = make_scenario("prototype-full", seed);
        s.laps = 1;
        Outing outing(s);
        Frame frame;
        std::uint64_t hash = 1469598103934665603ULL;
        for (int i = 0; i < 8000 && outing.next(frame); ++i) {
            for (std::size_t c = 0; c < kChannelCount; ++c) {
                if (!frame.has(static_cast<Channel>(c))) continue;
                hash = (hash ^ std::bit_cast<std::uint64_t>(frame.value[c])) * 1099511628211ULL;
            }
        }
        return hash;
    };
    CHECK(fingerprint(41) == fingerprint(41));
    CHECK(fingerprint(41) != fingerprint(42));
}

TEST_CASE("frames come at their rate, with every fitted channel and no other, seed 3") {
    Scenario s = make_scenario("open_wheel", 3);
    s.laps = 1;
    Outing outing(s);
    CHECK(outing.info().ride_height_names == std::vector<std::string>{"front", "rear_left", "rear_right"});
    Frame frame;
    std::uint64_t seen = 0;
    std::int64_t frames = 0;
    while (outing.next(frame)) {
        REQUIRE(frame.time_ns == frames * 2500000);
        seen |= frame.present;
        ++frames;
    }
    CHECK(seen == outing.info().channels);
    CHECK(!outing.next(frame));
    CHECK(outing.truth().size() == static_cast<std::size_t>((frames - 1) / 8));
}

TEST_CASE("the truth of a closing agrees with the sampled truth, seed 3") {
    Scenario s = make_scenario("open_wheel-sick", 3);
    Outing outing(s);
    Frame frame;
    while (outing.next(frame)) {
    }
    REQUIRE(outing.closures().size() >= 10);
    const auto& truth = outing.truth();
    const auto at = [&](double time_s) {  // newest sample not after
        return truth[static_cast<std::size_t>(std::floor(time_s * 50.0 + 1e-6)) - 1];
    };
    int whole = 0;
    for (const TruthClosure& c : outing.closures()) {
        CAPTURE(c.number);
        CHECK(at(c.time_closed_s - 0.021).flap_position > 0.0);
        CHECK(at(c.time_closed_s + 0.021).flap_position == 0.0);
        CHECK(c.speed_mps == Approx(at(c.time_command_s).speed_mps).margin(0.3));
        if (!std::isnan(c.time_brake_s)) {
            CHECK(c.attached_at_brake >= at(c.time_brake_s).attached - 1e-9);
            CHECK(c.attached_at_brake <= at(c.time_brake_s + 0.02).attached + 1e-9);
        }
        if (std::isnan(c.t95_s)) continue;
        ++whole;
        CHECK(at(c.time_closed_s + c.t95_s).attached <= 0.95 + 1e-6);
        CHECK(at(c.time_closed_s + c.t95_s + 0.02).attached >= 0.95 - 1e-6);
    }
    CHECK(whole >= 8);
}

TEST_CASE("truth is written as CSV with empty cells for what did not happen") {
    TruthClosure closure;
    closure.number = 1;
    closure.lap = 2;
    closure.time_command_s = 10.5;
    closure.t95_s = std::nan("");
    std::ostringstream out;
    write_truth_closures_csv(out, {closure});
    CHECK(out.str().find("t95_after_closed") != std::string::npos);
    CHECK(out.str().find("1,2,0,10.5000,0.0000,0.000,0.0000,0.0000,0.0000,0.0000,,0.0000") !=
          std::string::npos);
    std::ostringstream samples;
    write_truth_csv(samples, {TruthSample{}});
    CHECK(samples.str() ==
          "t,airspeed,rho,cla_front,cla_rear,cda,attached,flap,speed\n"
          "0.000,0.000,0.00000,0.0000,0.0000,0.0000,1.0000,0.000,0.000\n");
}
