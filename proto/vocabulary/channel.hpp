// SPDX-License-Identifier: MIT
// The channels of an outing: one record each (name, SI unit, range that can be believed, meaning).
// Axes are ISO 8855: x forward, y left, z up. Everything inside the program is in these SI units.
#pragma once

#include <array>
#include <cstddef>
#include <cstdint>
#include <string_view>

namespace holdfast {

// How many ride-height sensors a log may carry; their names are the log's own (ride_height_NAME).
inline constexpr std::size_t kMaxRideHeights = 8;

enum class Channel : std::uint8_t {
    speed,
    load_fl,
    load_fr,
    load_rl,
    load_rr,
    flap_position,
    flap_angle,  // flap_position logged as an angle; becomes flap_position once the car file is known
    flap_command,
    brake_pressure,
    accel_x,
    accel_y,
    accel_z,
    throttle,
    drive_force,
    pitot_pressure,
    heading,
    yaw_rate,
    lap,
    lap_distance,
    air_temperature,
    air_pressure,
    relative_humidity,
    ride_height_0,  // ride heights stay last: slot i is the i-th name of the stream's RideHeightNames
    count = ride_height_0 + kMaxRideHeights,
};

inline constexpr std::size_t kChannelCount = static_cast<std::size_t>(Channel::count);

[[nodiscard]] constexpr std::size_t index(Channel c) {
    return static_cast<std::size_t>(c);
}
[[nodiscard]] constexpr Channel ride_height_channel(std::size_t slot) {
    return static_cast<Channel>(index(Channel::ride_height_0) + slot);
}
[[nodiscard]] constexpr bool is_ride_height(Channel c) {
    return index(c) >= index(Channel::ride_height_0) && index(c) < kChannelCount;
}

struct ChannelInfo {
    std::string_view name;
    std::string_view si_unit;
    double least;  // a value outside [least, most] is not this quantity on a racing car: rejected, counted
    double most;
    std::string_view meaning;
};

inline constexpr std::array<ChannelInfo, index(Channel::ride_height_0)> kChannelInfo{{
    {"speed", "m/s", -5.0, 150.0, "speed over ground along x; wheel slip is in it"},
    {"load_fl", "N", -20e3, 60e3, "suspension load front left at the wheel, compression positive"},
    {"load_fr", "N", -20e3, 60e3, "suspension load front right at the wheel, compression positive"},
    {"load_rl", "N", -20e3, 60e3, "suspension load rear left at the wheel, compression positive"},
    {"load_rr", "N", -20e3, 60e3, "suspension load rear right at the wheel, compression positive"},
    {"flap_position", "-", -0.5, 1.5, "0 closed, 1 fully open"},
    {"flap_angle", "rad", -3.2, 3.2, "flap_position logged as an angle"},
    {"flap_command", "-", -0.1, 1.1, "1 open asked for, 0 closed asked for"},
    {"brake_pressure", "Pa", -5e6, 50e6, "brake line pressure"},
    {"accel_x", "m/s^2", -100.0, 100.0, "at the centre of gravity, without gravity's share"},
    {"accel_y", "m/s^2", -100.0, 100.0, "at the centre of gravity, without gravity's share"},
    {"accel_z", "m/s^2", -300.0, 300.0, "at the centre of gravity, with gravity: +9.81 at rest"},
    {"throttle", "-", -0.2, 1.2, "0 closed, 1 full"},
    {"drive_force", "N", -40e3, 60e3, "force of the driven wheels at the road"},
    {"pitot_pressure", "Pa", -2e3, 20e3, "dynamic pressure of the oncoming air"},
    {"heading", "rad", -700.0, 700.0, "course over ground, clockwise from north"},
    {"yaw_rate", "rad/s", -20.0, 20.0, "positive to the left"},
    {"lap", "-", -1.0, 1e6, "lap number"},
    {"lap_distance", "m", -1e3, 1e6, "distance since the lap began"},
    {"air_temperature", "K", 200.0, 350.0, "ambient air"},
    {"air_pressure", "Pa", 40e3, 120e3, "ambient air, static"},
    {"relative_humidity", "-", -0.05, 1.2, "ambient air, 0 to 1"},
}};

inline constexpr ChannelInfo kRideHeightInfo{"ride_height", "m", -0.2, 1.0, "sensor to road"};

// Record of a channel; every ride-height slot shares kRideHeightInfo.
[[nodiscard]] constexpr const ChannelInfo& info(Channel c) {
    return index(c) < kChannelInfo.size() ? kChannelInfo[index(c)] : kRideHeightInfo;
}

}  // namespace holdfast
