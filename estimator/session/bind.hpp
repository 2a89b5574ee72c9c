// SPDX-License-Identifier: MIT
// Car file and log together: which ride-height sensor of the car is which slot of the log's frames, whether
// the log has what this car needs, and flap angles into flap positions.
#pragma once

#include <string>
#include <vector>

#include "estimator/core/car.hpp"
#include "estimator/session/car_file.hpp"
#include "estimator/session/error.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::session {

// What the stream lacks for this car: a needed channel, a placed ride height at each axle, and both of the
// flap's end angles where its position is logged as an angle. Empty: nothing.
[[nodiscard]] Errors check_against(const CarFile& car_file, const StreamInfo& stream);

struct BoundCar {
    core::Car car;                                     // only sensors that the stream has, each with its slot
    std::vector<std::string> sensors_without_channel;  // of the car file, not in the stream
    std::vector<std::string> channels_without_sensor;  // of the stream, not placed by the car file
};

// Fails with the errors of check_against().
[[nodiscard]] Result<BoundCar> bind_ride_heights(const CarFile& car_file, const StreamInfo& stream);

// Turns flap_angle into flap_position, 0 closed and 1 open, by the car's end angles; every frame of a bound
// stream passes through it before the engine. Frames without flap_angle stay as they are.
class FrameAdapter {
  public:
    explicit FrameAdapter(const core::Car& car);
    void apply(Frame& frame) const;

  private:
    bool angles_known_;
    double closed_rad_;
    double travel_rad_;
};

}  // namespace holdfast::session
