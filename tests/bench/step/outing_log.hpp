// SPDX-License-Identifier: MIT
// What the engine is timed on: a log with its car, or an outing of the simulated car written into a log.
#pragma once

#include <string>
#include <vector>

#include "estimator/session/bind.hpp"
#include "estimator/session/car_file.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::bench {

struct OutingLog {
    std::string path;
    session::CarFile car_file;
    session::BoundCar bound;
    StreamInfo stream;
    std::vector<Frame> frames;  // as the engine gets them

    [[nodiscard]] double duration_s() const;
};

// Throws std::runtime_error that says what is wrong with the log or the car file.
[[nodiscard]] OutingLog read_outing(const std::string& log, const std::string& car_file);

// Writes log.csv.gz and car.toml of a simulated outing of some 90 s at 400 Hz into the folder.
void simulate_outing(const std::string& folder);

}  // namespace holdfast::bench
