// SPDX-License-Identifier: MIT
#include "estimator/core/air.hpp"

#include <algorithm>
#include <cmath>

namespace holdfast::core {

double moist_air_density(double temperature_k, double pressure_pa, double relative_humidity) {
    constexpr double kGasConstant = 8.314472;    // J/(mol K), as the 2007 equation uses it
    constexpr double kDryAirMass = 28.96546e-3;  // kg/mol at 400 umol/mol of carbon dioxide
    constexpr double kMassRatioTerm = 0.3780;    // 1 - M_water / M_dry
    const double temperature_c = temperature_k - 273.15;
    const double humidity = std::clamp(relative_humidity, 0.0, 1.0);

    const double saturation_pa =
        std::exp(1.2378847e-5 * temperature_k * temperature_k - 1.9121316e-2 * temperature_k + 33.93711047 -
                 6.3431645e3 / temperature_k);
    const double enhancement = 1.00062 + 3.14e-8 * pressure_pa + 5.6e-7 * temperature_c * temperature_c;
    const double water_fraction = humidity * enhancement * saturation_pa / pressure_pa;

    const double compressibility =
        1.0 -
        pressure_pa / temperature_k *
            (1.58123e-6 - 2.9331e-8 * temperature_c + 1.1043e-10 * temperature_c * temperature_c +
             (5.707e-6 - 2.051e-8 * temperature_c) * water_fraction +
             (1.9898e-4 - 2.376e-6 * temperature_c) * water_fraction * water_fraction) +
        pressure_pa * pressure_pa / (temperature_k * temperature_k) *
            (1.83e-11 - 0.765e-8 * water_fraction * water_fraction);

    return pressure_pa * kDryAirMass / (compressibility * kGasConstant * temperature_k) *
           (1.0 - kMassRatioTerm * water_fraction);
}

double standard_air_density(double altitude_m) {
    constexpr double kTemperature0_k = 288.15;
    constexpr double kLapse_kpm = 0.0065;
    constexpr double kExponent = 9.80665 / (287.05287 * kLapse_kpm) - 1.0;
    return kStandardAirDensity_kgpm3 * std::pow(1.0 - kLapse_kpm * altitude_m / kTemperature0_k, kExponent);
}

}  // namespace holdfast::core
