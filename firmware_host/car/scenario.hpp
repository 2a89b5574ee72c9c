// SPDX-License-Identifier: MIT
// One outing's worth of parameters, and named families of them.
#pragma once

#include <cstdint>
#include <string>
#include <string_view>
#include <vector>

#include "firmware_host/car/parameters.hpp"
#include "firmware_host/car/sensors.hpp"

namespace holdfast::sim {

struct Scenario {
    std::string name;  // how make_scenario was asked
    std::string car_name = "Car";
    std::uint64_t seed = 1;  // of everything random during the outing and of the workshop's errors
    int laps = 4;
    double frame_rate_hz = 400.0;
    ChassisParameters chassis;
    AeroParameters aero;
    FlapParameters flap;
    CircuitParameters circuit;
    RoadParameters road;
    AirParameters air;
    DriverParameters driver;
    std::vector<PlannedClosing> planned;
    SensorTable sensors{};
    std::vector<RideHeightPlace> ride_heights;  // slot i of the frame's ride heights; at most kMaxRideHeights
    std::vector<Fault> faults;
};

// The scenario that `name` asks for, drawn by `seed`: FAMILY[-VARIANT]..., such as "open_wheel" or
// "prototype-windy-rough". Families and variants with a line on each: scenario_help(). The same name and seed
// give the same scenario. Throws std::invalid_argument, naming the word that is not known and those that are.
[[nodiscard]] Scenario make_scenario(std::string_view name, std::uint64_t seed);

// One line for each family and variant.
[[nodiscard]] std::string scenario_help();

// Reads CHANNEL:KIND:FROM_S[:MAGNITUDE[:UNTIL_S]], for example "load_rl:drift:60:25"; the kinds are
// FaultKind's names. Channels as in the log; ride heights by the scenario's own names. Throws
// std::invalid_argument, saying what was wrong.
[[nodiscard]] Fault parse_fault(std::string_view text, const Scenario& scenario);

}  // namespace holdfast::sim
