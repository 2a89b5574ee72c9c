// SPDX-License-Identifier: MIT
#include "estimator/session/units.hpp"

#include <algorithm>
#include <array>
#include <numbers>
#include <utility>
#include <vector>

#include "estimator/session/error.hpp"

namespace holdfast::session {
namespace {

constexpr double kInch = 0.0254;
constexpr double kStandardGravity = 9.80665;
constexpr double kPoundForce = 4.4482216152605;
constexpr double kPsi = kPoundForce / (kInch * kInch);
constexpr double kDegree = std::numbers::pi / 180.0;

constexpr std::array kSpeed{Unit{"m/s", {}}, Unit{"km/h", {1.0 / 3.6}}, Unit{"mph", {0.44704}},
                            Unit{"kn", {1852.0 / 3600.0}}};
constexpr std::array kHeight{Unit{"mm", {1e-3}}, Unit{"m", {}}, Unit{"in", {kInch}}};
constexpr std::array kForce{Unit{"N", {}}, Unit{"kN", {1e3}}, Unit{"lbf", {kPoundForce}},
                            Unit{"kgf", {kStandardGravity}}};
constexpr std::array kShare{Unit{"%", {1e-2}}, Unit{"-", {}}};
// rad is what the writer of this folder uses, so that a converted log keeps every bit.
constexpr std::array kFlapAngle{Unit{"deg", {kDegree}}, Unit{"rad", {}}};
constexpr std::array kPlain{Unit{"-", {}}};
constexpr std::array kBrakePressure{Unit{"bar", {1e5}}, Unit{"kPa", {1e3}}, Unit{"MPa", {1e6}},
                                    Unit{"Pa", {}}, Unit{"psi", {kPsi}}};
constexpr std::array kAcceleration{Unit{"m/s^2", {}}, Unit{"g", {kStandardGravity}}};
constexpr std::array kPitotPressure{Unit{"Pa", {}}, Unit{"kPa", {1e3}}, Unit{"hPa", {1e2}},
                                    Unit{"mbar", {1e2}}, Unit{"psi", {kPsi}}};
constexpr std::array kHeading{Unit{"deg", {kDegree}}, Unit{"rad", {}}};
constexpr std::array kTurnRate{Unit{"rad/s", {}}, Unit{"deg/s", {kDegree}}};
constexpr std::array kDistance{Unit{"m", {}}, Unit{"km", {1e3}}, Unit{"ft", {0.3048}}};
constexpr std::array kTemperature{Unit{"degC", {1.0, 273.15}}, Unit{"K", {}},
                                  Unit{"degF", {1.0 / 1.8, 459.67 / 1.8}}};
constexpr std::array kAirPressure{Unit{"hPa", {1e2}}, Unit{"kPa", {1e3}}, Unit{"Pa", {}}, Unit{"mbar", {1e2}},
                                  Unit{"inHg", {3386.389}}};

constexpr std::array<std::pair<std::string_view, int>, 4> kTime{{{"s", 9}, {"ms", 6}, {"us", 3}, {"ns", 0}}};

bool is_ride_height_name(std::string_view name) {
    return name.size() > kRideHeightPrefix.size() && name.starts_with(kRideHeightPrefix);
}

// The channels that a column of this name may become: two for flap_position, which may be logged as an angle.
std::vector<Channel> candidates(std::string_view name) {
    if (is_ride_height_name(name)) return {Channel::ride_height_0};
    if (name == info(Channel::flap_position).name) return {Channel::flap_position, Channel::flap_angle};
    for (std::size_t i = 0; i < kChannelInfo.size(); ++i) {
        if (kChannelInfo[i].name == name && i != index(Channel::flap_angle)) return {static_cast<Channel>(i)};
    }
    return {};
}

}  // namespace

std::span<const Unit> units_of(Channel channel) {
    switch (channel) {
        case Channel::speed:
            return kSpeed;
        case Channel::load_fl:
        case Channel::load_fr:
        case Channel::load_rl:
        case Channel::load_rr:
        case Channel::drive_force:
            return kForce;
        case Channel::flap_position:
        case Channel::throttle:
        case Channel::relative_humidity:
            return kShare;
        case Channel::flap_angle:
            return kFlapAngle;
        case Channel::flap_command:
        case Channel::lap:
            return kPlain;
        case Channel::brake_pressure:
            return kBrakePressure;
        case Channel::accel_x:
        case Channel::accel_y:
        case Channel::accel_z:
            return kAcceleration;
        case Channel::pitot_pressure:
            return kPitotPressure;
        case Channel::heading:
            return kHeading;
        case Channel::yaw_rate:
            return kTurnRate;
        case Channel::lap_distance:
            return kDistance;
        case Channel::air_temperature:
            return kTemperature;
        case Channel::air_pressure:
            return kAirPressure;
        case Channel::ride_height_0:
        case Channel::count:
            break;
    }
    return kHeight;  // every slot of the ride heights
}

std::optional<ChannelUnit> find_unit(std::string_view channel_name, std::string_view unit) {
    for (const Channel channel : candidates(channel_name)) {
        for (const Unit& accepted : units_of(channel)) {
            if (accepted.name == unit) return ChannelUnit{channel, accepted.to_si};
        }
    }
    return std::nullopt;
}

std::optional<int> time_exponent(std::string_view unit) {
    const auto found =
        std::find_if(kTime.begin(), kTime.end(), [&](const auto& t) { return t.first == unit; });
    return found == kTime.end() ? std::nullopt : std::optional{found->second};
}

bool is_channel_name(std::string_view name) {
    return name == kTimeName || !candidates(name).empty();
}

std::string accepted_units(std::string_view channel_name) {
    std::vector<std::string> names;
    if (channel_name == kTimeName) {
        for (const auto& [unit, exponent] : kTime) names.emplace_back(unit);
    }
    for (const Channel channel : candidates(channel_name)) {
        for (const Unit& unit : units_of(channel)) names.emplace_back(unit.name);
    }
    return joined(names);
}

}  // namespace holdfast::session
