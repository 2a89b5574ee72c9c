// SPDX-License-Identifier: MIT
// What the engine has learned of the car beside its areas of the moment: for `holdfast settle` and
// summary.json. Standard uncertainties hold what the filters cannot know of themselves, as said at each.
#pragma once

#include <optional>

#include "estimator/core/car.hpp"

namespace holdfast::core {

struct LearnedAxle {
    // Springs and tyres in series, both corners, N/m, [compliance]; the scales of loads and ride heights and
    // the model's own error are in the uncertainty. Nothing until half a minute of straights has been seen.
    std::optional<Quantity> rate_npm;
    // Measured less true load, the error of the weight at rest included; the load sensors' scale is in the
    // uncertainty.
    Quantity load_offset_n;
    // Error of the share of the longitudinal transfer that the springs feel, relative; the heights of the
    // wheels' masses and of the links, which no state tells apart from it, are in the uncertainty.
    Quantity transfer;
    Quantity area_m2;  // downforce area at the static ride height, flap closed
    Quantity slope_m;  // its change with the ride height, m^2/m
    Quantity flap_m2;  // downforce area that goes with the flap's flow
};

struct Learned {
    LearnedAxle front;
    LearnedAxle rear;
    Quantity slip_drive;  // relative excess of the measured speed for a drive force of one weight
    Quantity slip_brake;  // relative lack of it for a brake force of one weight
    Quantity accel_offset_mps2;
    Quantity accel_gain;                  // relative
    Quantity drive_gain;                  // relative
    std::optional<Quantity> pitot_scale;  // measured over true; nothing where no pitot has been heard
};

}  // namespace holdfast::core
