// SPDX-License-Identifier: MIT
#include "estimator/session/bind.hpp"

#include <algorithm>

#include "estimator/session/needed_channels.hpp"

namespace holdfast::session {
namespace {

bool contains(const std::vector<std::string>& names, const std::string& name) {
    return std::find(names.begin(), names.end(), name) != names.end();
}

bool at_front(const core::RideHeightSensor& sensor, const core::Car& car) {
    return sensor.x_m > -0.5 * car.wheelbase_m;
}

}  // namespace

Errors check_against(const CarFile& car_file, const StreamInfo& stream) {
    Errors errors;
    const auto has = [&](Channel channel) { return ((stream.channels >> index(channel)) & 1U) != 0; };
    std::vector<std::string> missing;
    for (const Channel channel : kNeededChannels) {
        const bool as_angle = channel == Channel::flap_position && has(Channel::flap_angle);
        if (!has(channel) && !as_angle) missing.emplace_back(info(channel).name);
    }
    if (!missing.empty()) {
        errors.push_back(
            {stream.origin, 0, 0, "", "needed but not there: " + joined(missing) + "; expected all of them"});
    }
    for (const bool front : {true, false}) {
        std::vector<std::string> placed;
        bool found = false;
        for (std::size_t i = 0; i < car_file.car.ride_height_count; ++i) {
            if (at_front(car_file.car.ride_height[i], car_file.car) != front) continue;
            placed.push_back("ride_height_" + car_file.ride_height_names[i]);
            found = found || contains(stream.ride_height_names, car_file.ride_height_names[i]);
        }
        if (found) continue;
        const std::string axle = front ? "front" : "rear";
        if (placed.empty()) {
            errors.push_back({car_file.file, 0, 0, "ride_height",
                              "no sensor at the " + axle +
                                  " axle; expected at least one NAME = { static, x, y } with x "
                                  "nearer to that axle"});
        } else {
            errors.push_back({stream.origin, 0, 0, "",
                              "no ride height at the " + axle + " axle; expected " + joined(placed) +
                                  " (placed by " + car_file.file + ")"});
        }
    }
    if (has(Channel::flap_angle) && !car_file.car.flap_angles_known) {
        errors.push_back({car_file.file, 0, 0, "flap.closed_angle",
                          "missing, and " + stream.origin +
                              " has flap_position as an angle; expected closed_angle and "
                              "open_angle in [flap], in deg"});
    }
    return errors;
}

Result<BoundCar> bind_ride_heights(const CarFile& car_file, const StreamInfo& stream) {
    if (Errors errors = check_against(car_file, stream); !errors.empty()) return errors;
    BoundCar bound{car_file.car, {}, {}};
    bound.car.ride_height = {};
    bound.car.ride_height_count = 0;
    for (std::size_t i = 0; i < car_file.car.ride_height_count; ++i) {
        const std::string& name = car_file.ride_height_names[i];
        const auto slot = std::find(stream.ride_height_names.begin(), stream.ride_height_names.end(), name) -
                          stream.ride_height_names.begin();
        if (slot == std::ssize(stream.ride_height_names)) {
            bound.sensors_without_channel.push_back(name);
            continue;
        }
        core::RideHeightSensor& sensor = bound.car.ride_height[bound.car.ride_height_count++];
        sensor = car_file.car.ride_height[i];
        sensor.channel = ride_height_channel(static_cast<std::size_t>(slot));
    }
    for (const std::string& name : stream.ride_height_names) {
        if (!contains(car_file.ride_height_names, name)) bound.channels_without_sensor.push_back(name);
    }
    return bound;
}

FrameAdapter::FrameAdapter(const core::Car& car)
    : angles_known_(car.flap_angles_known),
      closed_rad_(car.flap_closed_angle_rad.value),
      travel_rad_(car.flap_open_angle_rad.value - car.flap_closed_angle_rad.value) {}

void FrameAdapter::apply(Frame& frame) const {
    if (!angles_known_ || !frame.has(Channel::flap_angle)) return;
    frame.set(Channel::flap_position, (frame.get(Channel::flap_angle) - closed_rad_) / travel_rad_);
    frame.erase(Channel::flap_angle);
}

}  // namespace holdfast::session
