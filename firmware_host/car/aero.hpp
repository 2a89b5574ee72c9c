// SPDX-License-Identifier: MIT
// The true aerodynamic areas: smooth functions of the floor's height over the road, of pitch and of how much
// of the flap's flow is attached.
#pragma once

#include "firmware_host/car/parameters.hpp"

namespace holdfast::sim {

struct Areas {
    double front_m2 = 0.0;  // downforce
    double rear_m2 = 0.0;
    double drag_m2 = 0.0;
};

// Floor heights at the axle lines, m; pitch relative to rest, rad, nose down; attached 0..1.
[[nodiscard]] Areas areas(const AeroParameters& aero, const FlapParameters& flap, double wheelbase_m,
                          double floor_front_m, double floor_rear_m, double pitch_rad, double attached);

// Density of moist air, kg/m^3, by CIPM-2007 (Picard et al., Metrologia 45, 2008).
[[nodiscard]] double air_density(const AirParameters& air);

}  // namespace holdfast::sim
