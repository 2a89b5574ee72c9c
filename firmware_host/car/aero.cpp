// SPDX-License-Identifier: MIT
#include "firmware_host/car/aero.hpp"

#include <cmath>

namespace holdfast::sim {
namespace {

double area_at(const AreaOverRideHeight& area, double height_m) {
    const double off = (height_m - area.best_height_m) / area.width_m;
    return area.area_m2 * (1.0 + area.gain / (1.0 + off * off));
}

}  // namespace

Areas areas(const AeroParameters& aero, const FlapParameters& flap, double wheelbase_m, double floor_front_m,
            double floor_rear_m, double pitch_rad, double attached) {
    const double by_pitch_m2 = aero.front_per_pitch_m2prad * pitch_rad;
    const double lost_m2 = flap.area_m2 * (1.0 - attached);
    // The wing stands `overhang` behind the rear axle: of its lift P the rear axle carries P (1 + o/L), the
    // front -P o/L.
    const double lever = flap.overhang_m / (wheelbase_m + flap.overhang_m);
    Areas result;
    result.front_m2 = area_at(aero.front, floor_front_m) + by_pitch_m2 + lost_m2 * lever;
    result.rear_m2 = area_at(aero.rear, floor_rear_m) - by_pitch_m2 - lost_m2;
    const double downforce_m2 = result.front_m2 + result.rear_m2;
    result.drag_m2 = aero.drag_base_m2 + aero.drag_per_downforce2 * downforce_m2 * downforce_m2 +
                     flap.drag_area_m2 * attached;
    return result;
}

double air_density(const AirParameters& air) {
    const double kelvin = air.temperature_k;
    const double celsius = kelvin - 273.15;
    const double pascal = air.pressure_pa;
    const double saturation_pa =
        std::exp(1.2378847e-5 * kelvin * kelvin - 1.9121316e-2 * kelvin + 33.93711047 - 6.3431645e3 / kelvin);
    const double enhancement = 1.00062 + 3.14e-8 * pascal + 5.6e-7 * celsius * celsius;
    const double vapour = air.relative_humidity * enhancement * saturation_pa / pascal;  // mole fraction
    const double ratio = pascal / kelvin;
    const double compressibility =
        1.0 -
        ratio *
            (1.58123e-6 - 2.9331e-8 * celsius + 1.1043e-10 * celsius * celsius +
             (5.707e-6 - 2.051e-8 * celsius) * vapour + (1.9898e-4 - 2.376e-6 * celsius) * vapour * vapour) +
        ratio * ratio * (1.83e-11 - 0.765e-8 * vapour * vapour);
    constexpr double kGas = 8.314472;        // J/(mol K), as CIPM-2007 has it
    constexpr double kDryAir = 28.96546e-3;  // kg/mol
    constexpr double kWater = 18.01528e-3;   // kg/mol
    return pascal * kDryAir / (compressibility * kGas * kelvin) * (1.0 - vapour * (1.0 - kWater / kDryAir));
}

}  // namespace holdfast::sim
