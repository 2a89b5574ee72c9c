// SPDX-License-Identifier: MIT
#include "estimator/session/units.hpp"

#include <catch2/catch.hpp>
#include <cmath>

namespace holdfast::session {
namespace {

struct Case {
    const char* channel;
    const char* unit;
    double value;
    double si;
    const char* source;
};

// Every unit of channels.md for one channel of each kind.
const Case kCases[] = {
    {"speed", "m/s", 12.5, 12.5, "SI"},
    {"speed", "km/h", 360.0, 100.0, "definition"},
    {"speed", "mph", 100.0, 44.704, "NIST SP 811 B.8: mile per hour, exact"},
    {"speed", "kn", 3600.0, 1852.0, "ISO 80000-3: nautical mile per hour"},
    {"ride_height_front", "mm", 30.0, 0.030, "SI"},
    {"ride_height_front", "m", 0.03, 0.03, "SI"},
    {"ride_height_front", "in", 1.0, 0.0254, "NIST SP 811 B.8: inch, exact"},
    {"load_fl", "N", 1.0, 1.0, "SI"},
    {"load_fr", "kN", 2.5, 2500.0, "SI"},
    {"load_rl", "lbf", 1.0, 4.4482216152605, "NIST SP 811 B.8: pound-force, exact"},
    {"load_rr", "kgf", 1.0, 9.80665, "NIST SP 811 B.8: kilogram-force, exact"},
    {"drive_force", "lbf", 100.0, 444.82216152605, "NIST SP 811 B.8"},
    {"flap_position", "%", 50.0, 0.5, "definition"},
    {"flap_position", "-", 0.5, 0.5, "definition"},
    {"flap_position", "deg", 180.0, 3.14159265358979324, "definition"},
    {"flap_command", "-", 1.0, 1.0, "definition"},
    {"brake_pressure", "bar", 1.0, 1e5, "NIST SP 811 B.8: bar, exact"},
    {"brake_pressure", "kPa", 1.0, 1e3, "SI"},
    {"brake_pressure", "MPa", 1.0, 1e6, "SI"},
    {"brake_pressure", "Pa", 1.0, 1.0, "SI"},
    {"brake_pressure", "psi", 1.0, 6894.757, "NIST SP 811 B.8: psi, 6.894 757 E+03"},
    {"accel_x", "m/s^2", -3.0, -3.0, "SI"},
    {"accel_y", "g", 1.0, 9.80665, "NIST SP 811 B.8: standard acceleration of free fall, exact"},
    {"accel_z", "g", 2.0, 19.6133, "NIST SP 811 B.8"},
    {"throttle", "%", 100.0, 1.0, "definition"},
    {"throttle", "-", 1.0, 1.0, "definition"},
    {"pitot_pressure", "Pa", 1.0, 1.0, "SI"},
    {"pitot_pressure", "kPa", 1.0, 1e3, "SI"},
    {"pitot_pressure", "hPa", 1.0, 1e2, "SI"},
    {"pitot_pressure", "mbar", 1.0, 1e2, "NIST SP 811 B.8: millibar, exact"},
    {"pitot_pressure", "psi", 1.0, 6894.757, "NIST SP 811 B.8"},
    {"heading", "deg", 90.0, 1.57079632679489662, "definition"},
    {"heading", "rad", 1.0, 1.0, "SI"},
    {"yaw_rate", "rad/s", 1.0, 1.0, "SI"},
    {"yaw_rate", "deg/s", 180.0, 3.14159265358979324, "definition"},
    {"lap", "-", 7.0, 7.0, "definition"},
    {"lap_distance", "m", 1.0, 1.0, "SI"},
    {"lap_distance", "km", 1.2, 1200.0, "SI"},
    {"lap_distance", "ft", 1.0, 0.3048, "NIST SP 811 B.8: foot, exact"},
    {"air_temperature", "degC", 25.0, 298.15, "NIST SP 811 B.8: T/K = t/degC + 273.15"},
    {"air_temperature", "K", 300.0, 300.0, "SI"},
    {"air_temperature", "degF", 32.0, 273.15, "NIST SP 811 B.8: T/K = (t/degF + 459.67)/1.8"},
    {"air_temperature", "degF", 212.0, 373.15, "NIST SP 811 B.8"},
    {"air_pressure", "hPa", 1013.25, 101325.0, "SI"},
    {"air_pressure", "kPa", 101.325, 101325.0, "SI"},
    {"air_pressure", "Pa", 101325.0, 101325.0, "SI"},
    {"air_pressure", "mbar", 1013.25, 101325.0, "NIST SP 811 B.8"},
    {"air_pressure", "inHg", 1.0, 3386.389, "NIST SP 811 B.8: inch of mercury, conventional"},
    {"relative_humidity", "%", 48.0, 0.48, "definition"},
    {"relative_humidity", "-", 0.48, 0.48, "definition"},
};

TEST_CASE("every unit is converted to its published value in SI") {
    for (const Case& c : kCases) {
        INFO(c.channel << " in " << c.unit << ", " << c.source);
        const auto found = find_unit(c.channel, c.unit);
        REQUIRE(found);
        // Published values have up to seven digits where they are not exact.
        const bool rounded = std::string_view(c.unit) == "psi";
        CHECK(found->to_si(c.value) == Approx(c.si).epsilon(rounded ? 1e-7 : 1e-14));
    }
}

TEST_CASE("a channel accepts its own units and no other") {
    CHECK(accepted_units("t") == "s, ms, us, ns");
    CHECK(accepted_units("speed") == "m/s, km/h, mph, kn");
    CHECK(accepted_units("ride_height_anything") == "mm, m, in");
    CHECK(accepted_units("air_pressure") == "hPa, kPa, Pa, mbar, inHg");
    CHECK(accepted_units("no_such_channel").empty());
    CHECK_FALSE(find_unit("speed", "N"));
    CHECK_FALSE(find_unit("speed", "M/S"));
    CHECK_FALSE(find_unit("lap", "%"));
    CHECK_FALSE(find_unit("brake_pressure", "inHg"));
}

TEST_CASE("each channel of the vocabulary has its SI unit among those it accepts") {
    for (std::size_t i = 0; i < kChannelCount; ++i) {
        const auto channel = static_cast<Channel>(i);
        INFO(info(channel).name);
        bool has_si = false;
        for (const Unit& unit : units_of(channel)) {
            if (unit.name == info(channel).si_unit) has_si = unit.to_si(123.456) == 123.456;
        }
        CHECK(has_si);
    }
}

TEST_CASE("names of channels") {
    CHECK(is_channel_name("t"));
    CHECK(is_channel_name("ride_height_rear_left"));
    CHECK_FALSE(is_channel_name("ride_height_"));
    CHECK_FALSE(is_channel_name("ride_height"));
    CHECK_FALSE(is_channel_name("flap_angle"));  // logged as flap_position[deg]
    CHECK(find_unit("flap_position", "deg")->channel == Channel::flap_angle);
    CHECK(find_unit("flap_position", "%")->channel == Channel::flap_position);
}

TEST_CASE("one conversion after another") {
    const Linear both = compose({.scale = 2.0, .offset = 36.0}, find_unit("speed", "km/h")->to_si);
    CHECK(both(180.0) == Approx(110.0));
    const Linear warm = compose({.scale = 0.1, .offset = -40.0}, find_unit("air_temperature", "degC")->to_si);
    CHECK(warm(650.0) == Approx(298.15));
    CHECK(std::signbit(compose({}, {})(-0.0)));
}

TEST_CASE("a unit of 1 keeps every bit, the sign of zero too") {
    const auto metre_per_second = find_unit("speed", "m/s");
    REQUIRE(metre_per_second);
    CHECK(std::signbit(metre_per_second->to_si(-0.0)));
}

}  // namespace
}  // namespace holdfast::session
