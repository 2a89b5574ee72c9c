// SPDX-License-Identifier: MIT
#pragma once

#include "firmware_host/car/scenario.hpp"

namespace holdfast::sim {

// The scenario itself where a car can be made of it; else std::invalid_argument that names the parameter, its
// value and its range.
const Scenario& checked(const Scenario& scenario);

}  // namespace holdfast::sim
