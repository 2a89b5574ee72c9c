// SPDX-License-Identifier: MIT
// The car file (TOML) into core::Car: every key known, in range and of the right type, or an error that says
// which is not, on which line, and what was expected.
#pragma once

#include <string>
#include <vector>

#include "estimator/core/car.hpp"
#include "estimator/session/error.hpp"

namespace holdfast::session {

struct CarFile {
    std::string file;
    std::string name;                            // of the car
    core::Car car;                               // its sensors' channels are set by bind_ride_heights()
    std::vector<std::string> ride_height_names;  // of car.ride_height, same order
};

// All errors of the file at once, in the order of their lines.
[[nodiscard]] Result<CarFile> read_car_file(const std::string& path);

}  // namespace holdfast::session
