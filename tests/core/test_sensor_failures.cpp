// SPDX-License-Identifier: MIT
// One sensor failing, kind by kind: stuck, gone, stepped, spiking, drifting. Each is named in time and no
// other sensor is; the areas stay within their bands; no verdict at the brakes is wrong.
#include <catch2/catch.hpp>
#include <cmath>
#include <string>
#include <vector>

#include "tests/core/scenario.hpp"

namespace {

using namespace holdfast;
using namespace holdfast::testing;

constexpr double kFrom_s = 62.0;
constexpr double kWithin_s = 2.0, kDriftWithin_s = 10.0;
constexpr double kShortShare = 0.03;

struct Failure {
    const char* car;
    const char* fault;  // CHANNEL:KIND, and how much
    double within_s = kWithin_s;
};

std::string fault_text(const Failure& f) {
    const std::string text = f.fault;
    const std::size_t magnitude = text.find('=');
    const std::string from = ":" + std::to_string(kFrom_s);
    if (magnitude == std::string::npos) return text + from;
    return text.substr(0, magnitude) + from + ":" + text.substr(magnitude + 1);
}

void check_named(const Failure& failure, const Follow& follow, Channel c) {
    double named_after_s = std::nan("");
    for (const core::Alarm& a : follow.alarms()) {
        if (a.kind != core::AlarmKind::sensor_distrusted) continue;
        INFO("named at " << static_cast<double>(a.time_ns) * 1e-9
                         << " s: " << channel_name(a.channel, follow.drive().info().ride_height_names));
        CHECK(a.channel == c);
        if (std::isnan(named_after_s)) named_after_s = static_cast<double>(a.time_ns) * 1e-9 - kFrom_s;
    }
    CHECK(named_after_s >= 0.0);
    CHECK(named_after_s <= failure.within_s);
}

// Above 50 m/s, from the fault on: the mean error against the mean of what is stated.
void check_areas(const Follow& follow) {
    double front = 0.0, rear = 0.0, front_sd = 0.0, rear_sd = 0.0, n = 0.0;
    for (const core::Estimate& e : follow.estimates()) {
        const double time_s = static_cast<double>(e.time_ns) * 1e-9;
        const sim::TruthSample& truth = follow.drive().truth_at(time_s);
        if (time_s < kFrom_s || truth.speed_mps < 50.0) continue;
        front += e.cla_front_m2.value - truth.cla_front_m2;
        rear += e.cla_rear_m2.value - truth.cla_rear_m2;
        front_sd += e.cla_front_m2.sd;
        rear_sd += e.cla_rear_m2.sd;
        n += 1.0;
    }
    REQUIRE(n > 100.0);
    CHECK(std::abs(front) < 2.5 * front_sd);
    CHECK(std::abs(rear) < 2.5 * rear_sd);
}

void check_verdicts(const Follow& follow) {
    for (const sim::TruthClosure& truth : follow.drive().closings()) {
        const auto found = follow.found(truth);
        if (!found || !found->braked || std::isnan(truth.time_brake_s)) continue;
        INFO("closing at " << truth.time_closed_s << " s, missing at the brakes " << truth.missing_share);
        const auto wrong = truth.missing_share > kShortShare ? core::Verdict::full : core::Verdict::short_of;
        CHECK(found->verdict != wrong);
    }
}

void check(const Failure& failure, std::uint64_t seed) {
    const std::string text = fault_text(failure);
    INFO(failure.car << ", seed " << seed << ", " << text);
    Channel channel{};
    const Drive drive(failure.car, seed, [&](sim::Scenario& s) {
        s.laps = 2;
        s.driver.slow_probability = 0.0;
        s.faults.push_back(sim::parse_fault(text, s));
        channel = s.faults.back().channel;
    });
    Follow follow(drive);
    follow.until(kFrom_s + 40.0);
    check_named(failure, follow, channel);
    check_areas(follow);
    check_verdicts(follow);
}

}  // namespace

TEST_CASE("loads and ride heights failing one at a time, seed 21", "[long]") {
    const std::vector<Failure> failures{
        {"open_wheel", "load_rl:stuck"},
        {"open_wheel", "load_fr:gone"},
        {"prototype", "load_rr:step=800"},
        {"open_wheel", "load_fl:spikes=2000"},
        {"prototype", "load_rl:drift=60", kDriftWithin_s},
        {"open_wheel", "ride_height_front:stuck"},
        {"prototype", "ride_height_rear_left:gone"},
        {"prototype", "ride_height_rear_left:step=0.006"},
        {"prototype", "ride_height_front_left:spikes=0.01"},
        {"open_wheel", "ride_height_rear_right:drift=0.0005", kDriftWithin_s},
    };
    for (const Failure& f : failures) check(f, 21);
}

TEST_CASE("speed, air speed and accelerations failing one at a time, seed 22", "[long]") {
    const std::vector<Failure> failures{
        {"open_wheel", "speed:stuck"},
        {"prototype", "speed:gone"},
        {"open_wheel", "speed:step=5"},
        {"open_wheel", "speed:drift=0.3", kDriftWithin_s},
        {"open_wheel", "accel_x:gone"},
        {"prototype", "accel_x:step=3"},
        {"open_wheel", "accel_x:drift=0.2", kDriftWithin_s},
        {"open_wheel", "accel_y:step=4"},
        {"open_wheel-full", "accel_z:step=5"},
        {"open_wheel-full", "accel_z:drift=0.3", kDriftWithin_s},
        {"prototype-full", "pitot_pressure:step=-800"},
        {"open_wheel-full", "pitot_pressure:stuck"},
        {"open_wheel-full", "pitot_pressure:drift=60", kDriftWithin_s},
    };
    for (const Failure& f : failures) check(f, 22);
}

TEST_CASE("flap, brakes, drive and heading failing one at a time, seed 23", "[long]") {
    const std::vector<Failure> failures{
        {"open_wheel", "flap_position:gone"},
        {"open_wheel", "flap_position:spikes=0.3"},
        {"open_wheel", "flap_position:drift=0.02", kDriftWithin_s},
        {"open_wheel", "flap_command:gone"},
        {"open_wheel", "brake_pressure:stuck"},
        {"prototype", "brake_pressure:step=1000000", kDriftWithin_s},
        {"open_wheel", "drive_force:gone"},
        {"open_wheel", "drive_force:step=6000", kDriftWithin_s},
        {"open_wheel-full", "heading:gone"},
    };
    for (const Failure& f : failures) check(f, 23);
}
