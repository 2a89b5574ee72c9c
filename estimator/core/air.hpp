// SPDX-License-Identifier: MIT
// Density of moist air after CIPM-2007 (Picard, Davis, Glaeser, Fujii, Metrologia 45, 2008, 149-155) and of
// the standard atmosphere (ISO 2533). Uncertainty of the CIPM equation itself is 2.2e-5, relative.
#pragma once

namespace holdfast::core {

inline constexpr double kStandardAirDensity_kgpm3 = 1.225;  // ISO 2533 at sea level

// Temperature K, pressure Pa, relative humidity 0..1; kg/m^3. Valid 600..1100 hPa, 15..27 degC; smooth
// beyond.
[[nodiscard]] double moist_air_density(double temperature_k, double pressure_pa, double relative_humidity);

// ISO 2533 troposphere, geopotential altitude in m; kg/m^3.
[[nodiscard]] double standard_air_density(double altitude_m);

}  // namespace holdfast::core
