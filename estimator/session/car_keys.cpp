// SPDX-License-Identifier: MIT
#include "estimator/session/car_keys.hpp"

#include <array>
#include <cmath>
#include <numbers>
#include <ostream>
#include <string>

#include "estimator/session/error.hpp"

namespace holdfast::session {
namespace {

using core::Car;
using core::Quantity;
using Need = CarKey::Need;

constexpr DefaultSd kExact{};
constexpr DefaultSd share(double size) {
    return {DefaultSd::Kind::share_of_value, size};
}
constexpr DefaultSd absolute(double size) {
    return {DefaultSd::Kind::absolute, size};
}

Quantity from_degrees(const Quantity& q) {
    constexpr double kDegree = std::numbers::pi / 180.0;
    return {q.value * kDegree, q.sd * kDegree};
}

// clang-format off
constexpr std::array kKeys{
    CarKey{"car", "mass", "kg", 200, 3000, Need::needed, 0, share(0.005),
           "All up, driver and fuel at the start of the outing.",
           [](Car& c, std::size_t, const Quantity& q) { c.mass_kg = q; }},
    CarKey{"car", "fuel_per_lap", "kg", 0, 20, Need::has_default, 0, share(0.10),
           "Fuel burnt in one lap.",
           [](Car& c, std::size_t, const Quantity& q) { c.fuel_per_lap_kg = q; }},
    CarKey{"car", "wheelbase", "m", 1, 6, Need::needed, 0, kExact,
           "From the front axle to the rear axle.",
           [](Car& c, std::size_t, const Quantity& q) { c.wheelbase_m = q.value; }},
    CarKey{"car", "front_weight_share", "-", 0.2, 0.8, Need::needed, 0, share(0.004),
           "Static share of the weight on the front axle.",
           [](Car& c, std::size_t, const Quantity& q) { c.front_weight_share = q; }},
    CarKey{"car", "cg_height", "m", 0.05, 1.5, Need::needed, 0, share(0.05),
           "Centre of gravity above the road.",
           [](Car& c, std::size_t, const Quantity& q) { c.cg_height_m = q; }},
    CarKey{"car", "pitch_inertia", "kg m^2", 50, 20000, Need::needed, 0, share(0.10),
           "Sprung mass about its centre of gravity.",
           [](Car& c, std::size_t, const Quantity& q) { c.pitch_inertia_kgm2 = q; }},
    CarKey{"car", "roll_inertia", "kg m^2", 10, 10000, Need::needed, 0, share(0.10),
           "Sprung mass about its centre of gravity.",
           [](Car& c, std::size_t, const Quantity& q) { c.roll_inertia_kgm2 = q; }},
    CarKey{"car", "rolling_resistance", "-", 0, 0.1, Need::needed, 0, share(0.10),
           "Rolling resistance over the load on the tyres.",
           [](Car& c, std::size_t, const Quantity& q) { c.rolling_resistance = q; }},

    CarKey{"front", "track", "m", 0.5, 3, Need::needed, 0, kExact,
           "Between the middles of the front tyres.",
           [](Car& c, std::size_t, const Quantity& q) { c.front.track_m = q.value; }},
    CarKey{"front", "unsprung_mass", "kg", 1, 150, Need::needed, 0, share(0.05),
           "One front corner.",
           [](Car& c, std::size_t, const Quantity& q) { c.front.unsprung_mass_kg = q; }},
    CarKey{"front", "wheel_rate", "N/m", 1e3, 5e6, Need::needed, 0, share(0.03),
           "One front corner, spring at the wheel.",
           [](Car& c, std::size_t, const Quantity& q) { c.front.wheel_rate_npm = q; }},
    CarKey{"front", "anti_roll_rate", "N/m", 0, 5e6, Need::needed, 0, share(0.05),
           "One front corner.",
           [](Car& c, std::size_t, const Quantity& q) { c.front.anti_roll_rate_npm = q; }},
    CarKey{"front", "damping", "N s/m", 10, 1e5, Need::needed, 0, share(0.15),
           "One front corner, at the wheel, mean of bump and rebound.",
           [](Car& c, std::size_t, const Quantity& q) { c.front.damping_nspm = q; }},
    CarKey{"front", "tyre_rate", "N/m", 1e4, 5e6, Need::needed, 0, share(0.05),
           "One front tyre, vertical.",
           [](Car& c, std::size_t, const Quantity& q) { c.front.tyre_rate_npm = q; }},
    CarKey{"front", "anti_dive", "-", -1, 2, Need::has_default, 0, absolute(0.03),
           "Share of the load transfer under braking that the front links carry past the springs.",
           [](Car& c, std::size_t, const Quantity& q) { c.front.anti_brake_share = q; }},

    CarKey{"rear", "track", "m", 0.5, 3, Need::needed, 0, kExact,
           "Between the middles of the rear tyres.",
           [](Car& c, std::size_t, const Quantity& q) { c.rear.track_m = q.value; }},
    CarKey{"rear", "unsprung_mass", "kg", 1, 150, Need::needed, 0, share(0.05),
           "One rear corner.",
           [](Car& c, std::size_t, const Quantity& q) { c.rear.unsprung_mass_kg = q; }},
    CarKey{"rear", "wheel_rate", "N/m", 1e3, 5e6, Need::needed, 0, share(0.03),
           "One rear corner, spring at the wheel.",
           [](Car& c, std::size_t, const Quantity& q) { c.rear.wheel_rate_npm = q; }},
    CarKey{"rear", "anti_roll_rate", "N/m", 0, 5e6, Need::needed, 0, share(0.05),
           "One rear corner.",
           [](Car& c, std::size_t, const Quantity& q) { c.rear.anti_roll_rate_npm = q; }},
    CarKey{"rear", "damping", "N s/m", 10, 1e5, Need::needed, 0, share(0.15),
           "One rear corner, at the wheel, mean of bump and rebound.",
           [](Car& c, std::size_t, const Quantity& q) { c.rear.damping_nspm = q; }},
    CarKey{"rear", "tyre_rate", "N/m", 1e4, 5e6, Need::needed, 0, share(0.05),
           "One rear tyre, vertical.",
           [](Car& c, std::size_t, const Quantity& q) { c.rear.tyre_rate_npm = q; }},
    CarKey{"rear", "anti_lift", "-", -1, 2, Need::has_default, 0, absolute(0.03),
           "Share of the load transfer under braking that the rear links carry past the springs.",
           [](Car& c, std::size_t, const Quantity& q) { c.rear.anti_brake_share = q; }},
    CarKey{"rear", "anti_squat", "-", -1, 2, Need::has_default, 0, absolute(0.03),
           "Share of the load transfer under drive that the rear links carry past the springs.",
           [](Car& c, std::size_t, const Quantity& q) { c.rear.anti_squat_share = q; }},

    CarKey{"flap", "chord", "m", 0.02, 2, Need::needed, 0, kExact,
           "Reference chord for convective time t V / c.",
           [](Car& c, std::size_t, const Quantity& q) { c.flap_chord_m = q.value; }},
    CarKey{"flap", "closed_angle", "deg", -180, 180, Need::optional, 0, absolute(0.3),
           "Flap angle when closed; needed, with open_angle, where flap_position is logged as an angle.",
           [](Car& c, std::size_t, const Quantity& q) { c.flap_closed_angle_rad = from_degrees(q); }},
    CarKey{"flap", "open_angle", "deg", -180, 180, Need::optional, 0, absolute(0.3),
           "Flap angle when fully open.",
           [](Car& c, std::size_t, const Quantity& q) { c.flap_open_angle_rad = from_degrees(q); }},

    CarKey{"ride_height", "tyre_growth", "m/(m/s)^2", 0, 1e-5, Need::needed, 0, share(0.20),
           "Rise of the axle with the square of speed.",
           [](Car& c, std::size_t, const Quantity& q) { c.tyre_growth_s2pm = q; }},
    CarKey{kSensorTable, "static", "m", -0.1, 1, Need::needed, 0, absolute(0.5e-3),
           "What the sensor ride_height_NAME reads at rest.",
           [](Car& c, std::size_t i, const Quantity& q) { c.ride_height[i].static_m = q; }},
    CarKey{kSensorTable, "x", "m", -10, 5, Need::needed, 0, kExact,
           "Place of the sensor: from the front axle line, forward.",
           [](Car& c, std::size_t i, const Quantity& q) { c.ride_height[i].x_m = q.value; }},
    CarKey{kSensorTable, "y", "m", -3, 3, Need::needed, 0, kExact,
           "Place of the sensor: from the middle, to the left.",
           [](Car& c, std::size_t i, const Quantity& q) { c.ride_height[i].y_m = q.value; }},
};
// clang-format on

std::string default_text(const CarKey& key) {
    switch (key.need) {
        case Need::needed:
            return "needed";
        case Need::has_default:
            return number_text(key.fallback);
        case Need::optional:
            break;
    }
    return "unknown";
}

std::string sd_text(const CarKey& key) {
    switch (key.sd.kind) {
        case DefaultSd::Kind::exact:
            return "exact";
        case DefaultSd::Kind::absolute:
            return number_text(key.sd.size) + (key.unit == "-" ? "" : " " + std::string(key.unit));
        case DefaultSd::Kind::share_of_value:
            break;
    }
    return number_text(100.0 * key.sd.size) + " %";
}

}  // namespace

double DefaultSd::of(double value) const {
    switch (kind) {
        case Kind::exact:
            return 0.0;
        case Kind::absolute:
            return size;
        case Kind::share_of_value:
            break;
    }
    return size * std::fabs(value);
}

std::span<const CarKey> car_keys() {
    return kKeys;
}

void print_key_reference(std::ostream& out) {
    out << "# The car file\n\n"
           "TOML, SI units, angles in degrees. `<key>_sd` beside any number gives its standard uncertainty "
           "in the "
           "same unit; the last but one column is what it is otherwise. A key that is \"exact\" there may "
           "have a "
           "`_sd` too, but the estimator takes the value as exact.\n"
           "`[car]` `name` is a text: what outputs call the car.\n"
           "Each ride-height sensor is `NAME = { static, x, y }` in `[ride_height]`, for the log's channel "
           "`ride_height_NAME`.\n";
    std::string_view table;
    for (const CarKey& key : kKeys) {
        if (key.table != table) {
            table = key.table;
            out << "\n## [" << table
                << "]\n\n| key | unit | least | most | default | standard uncertainty | meaning |\n"
                << "|---|---|---|---|---|---|---|\n";
        }
        out << "| `" << key.key << "` | " << key.unit << " | " << number_text(key.least) << " | "
            << number_text(key.most) << " | " << default_text(key) << " | " << sd_text(key) << " | "
            << key.meaning << " |\n";
    }
}

}  // namespace holdfast::session
