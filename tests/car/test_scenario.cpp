// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <cmath>

#include "firmware_host/car/outing.hpp"

namespace {

using namespace holdfast;
using namespace holdfast::sim;
using Catch::Matchers::Contains;

}  // namespace

TEST_CASE("every family drives its laps, opens its flap and brakes after closing it, seeds 1 to 4") {
    const auto* name = GENERATE("open_wheel", "prototype-windy-rough", "heavy_closed-noisy-full");
    const std::uint64_t seed = GENERATE(1, 2, 3, 4);
    CAPTURE(name, seed);
    Scenario scenario = make_scenario(name, seed);
    scenario.laps = 1;
    Outing outing(scenario);
    Frame frame;
    double fastest = 0.0;
    bool sound = true;
    while (outing.next(frame)) {
        fastest = std::max(fastest, outing.true_values()[index(Channel::speed)]);
        for (const double value : outing.true_values()) sound = sound && std::isfinite(value);
        for (std::size_t i = 0; i < kChannelCount; ++i) {
            const auto channel = static_cast<Channel>(i);
            if (!frame.has(channel)) continue;
            sound = sound && frame.get(channel) >= info(channel).least &&
                    frame.get(channel) <= info(channel).most;
        }
    }
    CHECK(sound);
    CHECK(fastest > 65.0);
    CHECK(fastest < 105.0);
    CHECK(outing.closures().size() >= 3);
    CHECK(outing.closures().size() <= 4);
    for (const TruthClosure& closure : outing.closures()) {
        CHECK(closure.zone > 0);
        CHECK(closure.time_brake_s - closure.time_closed_s > 0.0);
        CHECK(closure.time_brake_s - closure.time_closed_s < 0.7);
    }
}

TEST_CASE("the demonstration outing has eight closings: two slow, one of them short at the brakes, seed 11") {
    Outing outing(make_scenario("open_wheel-first-demo", 11));
    Frame frame;
    while (outing.next(frame)) {
    }
    REQUIRE(outing.closures().size() == 8);
    int slow = 0;
    int short_at_brakes = 0;
    for (const TruthClosure& closure : outing.closures()) {
        slow += closure.slow ? 1 : 0;
        short_at_brakes += closure.missing_share > 0.03 ? 1 : 0;
    }
    CHECK(slow == 2);
    CHECK(short_at_brakes == 1);
}

TEST_CASE("a planned closing comes as planned") {
    Scenario scenario = make_scenario("open_wheel-healthy-smooth-calm", 5);
    scenario.laps = 1;
    PlannedClosing plan;
    plan.lap = 1;
    plan.zone = 1;
    plan.tau_factor = 3.0;
    plan.plateau = 0.8;
    plan.closing_time_s = 0.15;
    plan.gap_s = 0.25;
    scenario.planned = {plan};
    Outing outing(scenario);
    Frame frame;
    while (outing.next(frame)) {
    }
    REQUIRE(!outing.closures().empty());
    const TruthClosure& closure = outing.closures().front();
    CHECK(closure.zone == 1);
    CHECK(closure.slow);
    CHECK(closure.plateau == 0.8);
    CHECK(std::isnan(closure.t95_s));
    CHECK(closure.closing_time_s == Approx(0.15).margin(0.002));
    CHECK(closure.time_brake_s - closure.time_closed_s == Approx(0.25).margin(0.06));
    CHECK(closure.tau_s ==
          Approx(3.0 * scenario.flap.tau_chords * scenario.flap.chord_m / closure.speed_mps).epsilon(0.03));
}

TEST_CASE("an unknown word of a scenario's name is named, with those that are known") {
    CHECK_THROWS_WITH(make_scenario("tractor", 1), Contains("\"tractor\"") && Contains("open_wheel"));
    CHECK_THROWS_WITH(make_scenario("prototype-wet", 1), Contains("\"wet\"") && Contains("windy"));
}

TEST_CASE("a parameter that makes no car is named with its range") {
    Scenario scenario = make_scenario("open_wheel", 1);
    scenario.chassis.front.tyre_rate_npm = -1.0;
    CHECK_THROWS_WITH(Outing(scenario), Contains("chassis.front.tyre_rate_npm is -1") && Contains("20000"));
    scenario = make_scenario("open_wheel", 1);
    scenario.chassis.wheelbase_m = std::nan("");
    CHECK_THROWS_WITH(Outing(scenario), Contains("chassis.wheelbase_m"));
    scenario = make_scenario("open_wheel", 1);
    scenario.sensors[index(Channel::load_fl)].rate_hz = 800.0;
    CHECK_THROWS_WITH(Outing(scenario), Contains("load_fl rate_hz is 800") && Contains("400"));
}

TEST_CASE("faults are read from their text form") {
    const Scenario scenario = make_scenario("open_wheel", 1);
    const Fault fault = parse_fault("load_rl:drift:60:25", scenario);
    CHECK(fault.channel == Channel::load_rl);
    CHECK(fault.kind == FaultKind::drift);
    CHECK(fault.from_s == 60.0);
    CHECK(fault.magnitude == 25.0);
    CHECK(std::isinf(fault.until_s));
    CHECK(parse_fault("ride_height_rear_left:stuck:3:0:9", scenario).channel == ride_height_channel(1));
    CHECK_THROWS_WITH(parse_fault("load_rl:drift:60", scenario), Contains("needs a magnitude"));
    CHECK_THROWS_WITH(parse_fault("load_xx:gone:1", scenario),
                      Contains("load_xx") && Contains("CHANNEL:KIND"));
    CHECK_THROWS_WITH(parse_fault("load_rl:melt:1", scenario), Contains("melt") && Contains("stuck"));
    CHECK_THROWS_WITH(parse_fault("load_rl:gone:soon", scenario), Contains("soon"));
    CHECK_THROWS_WITH(parse_fault("load_rl", scenario), Contains("1 parts"));
    CHECK_THROWS_WITH(parse_fault("accel_z:gone:1", scenario), Contains("no channel"));
}
