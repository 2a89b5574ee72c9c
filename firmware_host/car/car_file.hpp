// SPDX-License-Identifier: MIT
// The car file that a workshop would have written: the true car, off by what its measurements are off.
#pragma once

#include <string>

#include "firmware_host/car/scenario.hpp"

namespace holdfast::sim {

// TOML, SI units, keys as the estimator's car file has them. Each value is the truth with an error drawn from
// the seed, normal with `error_scale` times the key's default standard uncertainty; 0 gives the truth itself.
[[nodiscard]] std::string car_file_text(const Scenario& scenario, double error_scale = 1.0);

}  // namespace holdfast::sim
