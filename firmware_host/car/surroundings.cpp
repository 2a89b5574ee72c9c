// SPDX-License-Identifier: MIT
// Circuits and sensors, drawn.
#include <cmath>
#include <numbers>

#include "firmware_host/car/families.hpp"

namespace holdfast::sim {
namespace {

struct Corner {
    double radius_m;
    double angle_rad;  // positive to the left
};

void add_corner(CircuitParameters& circuit, double& at_m, const Corner& corner, Random& random) {
    const double length_m = corner.radius_m * std::abs(corner.angle_rad);
    const bool left = corner.angle_rad > 0.0;
    circuit.segments.push_back({length_m, (left ? 1.0 : -1.0) / corner.radius_m, false});
    // Inner kerb near the apex, outer kerb at the exit.
    if (random.happens(0.7)) {
        circuit.kerbs.push_back(
            {at_m + 0.4 * length_m, random.uniform(1.5, 4.0), random.uniform(0.004, 0.014), left});
    }
    if (random.happens(0.7)) {
        circuit.kerbs.push_back(
            {at_m + 0.95 * length_m, random.uniform(1.5, 4.0), random.uniform(0.004, 0.014), !left});
    }
    at_m += length_m;
}

}  // namespace

CircuitParameters draw_circuit(int flap_straights, double long_straight_m, Random& random) {
    // Each long straight ends in a slow corner; then a short straight and a faster corner lead to the next.
    std::vector<Corner> corners;
    double left_rad = 0.0;
    double right_rad = 0.0;
    for (int i = 0; i < 2 * flap_straights; ++i) {
        const bool slow = i % 2 == 0;
        const double angle = slow ? random.uniform(1.3, 2.6) : random.uniform(0.8, 1.6);
        const bool left = slow || random.happens(0.4);
        corners.push_back(
            {slow ? random.uniform(38.0, 75.0) : random.uniform(85.0, 130.0), left ? angle : -angle});
        (left ? left_rad : right_rad) += angle;
    }
    // Once round in all.
    const double stretch = (2.0 * std::numbers::pi + right_rad) / left_rad;
    for (Corner& corner : corners) {
        if (corner.angle_rad > 0.0) corner.angle_rad *= stretch;
    }
    CircuitParameters circuit;
    double at_m = 0.0;
    const auto straight = [&](double length_m, bool flap) {
        circuit.segments.push_back({length_m, 0.0, flap});
        at_m += length_m;
    };
    const double before_line_m =
        random.uniform(0.25, 0.40);  // share of the first straight that lies before the line
    const double first_m = long_straight_m * random.uniform(1.0, 1.2);
    for (int i = 0; i < flap_straights; ++i) {
        straight(i == 0 ? (1.0 - before_line_m) * first_m : long_straight_m * random.uniform(0.8, 1.2), true);
        add_corner(circuit, at_m, corners[static_cast<std::size_t>(2 * i)], random);
        straight(random.uniform(260.0, 420.0), false);
        add_corner(circuit, at_m, corners[static_cast<std::size_t>(2 * i + 1)], random);
    }
    straight(before_line_m * first_m, true);
    circuit.elevation_m = random.uniform(0.0, 6.0);
    circuit.elevation_waves = 1 + static_cast<int>(random.uniform(0.0, 3.0));
    return circuit;
}

SensorTable draw_sensors(std::size_t ride_heights, double scale, Random& random) {
    constexpr double kFastHz = 400.0;
    constexpr double kSlowHz = 100.0;
    constexpr double kWeatherHz = 1.0;
    SensorTable table{};
    // Steps are powers of two, as those of converters are; short mantissas also pack well into a recording.
    // Gain error, offset and drift are given as standard deviations and drawn.
    const auto fit = [&](Channel c, double rate_hz, double noise_sd, double gain_sd, double offset_sd,
                         double drift_sd_per_s, double resolution) {
        SensorParameters& sensor = table[index(c)];
        sensor.fitted = true;
        sensor.rate_hz = rate_hz;
        sensor.first_s = rate_hz == kSlowHz ? 3.0 / kFastHz : 0.0;
        sensor.noise_sd = scale * noise_sd;
        sensor.gain_error = scale * gain_sd * random.normal();
        sensor.offset = scale * offset_sd * random.normal();
        sensor.drift_per_s = scale * drift_sd_per_s * random.normal();
        sensor.resolution = resolution;
    };
    for (const Channel c : {Channel::load_fl, Channel::load_fr, Channel::load_rl, Channel::load_rr}) {
        fit(c, kFastHz, 37.0, 0.01, 30.0, 0.05, 1.0);
    }
    for (std::size_t i = 0; i < ride_heights; ++i) {
        fit(ride_height_channel(i), kFastHz, 0.3e-3, 0.003, 0.3e-3, 0.5e-6, 0x1p-17);
    }
    fit(Channel::speed, kSlowHz, 0.04, 0.001, 0.0, 0.0, 0x1p-9);
    fit(Channel::flap_position, kFastHz, 0.004, 0.003, 0.003, 0.0, 0x1p-12);
    fit(Channel::flap_command, kFastHz, 0.0, 0.0, 0.0, 0.0, 0.0);
    fit(Channel::brake_pressure, kSlowHz, 8e3, 0.01, 4e3, 0.0, 256.0);
    fit(Channel::accel_x, kFastHz, 0.33, 0.005, 0.08, 0.0, 0x1p-7);
    fit(Channel::accel_y, kFastHz, 0.30, 0.005, 0.08, 0.0, 0x1p-7);
    fit(Channel::throttle, kSlowHz, 0.0, 0.0, 0.0, 0.0, 0x1p-10);
    fit(Channel::drive_force, kSlowHz, 60.0, 0.025, 40.0, 0.0, 1.0);
    fit(Channel::lap, kSlowHz, 0.0, 0.0, 0.0, 0.0, 0.0);
    fit(Channel::lap_distance, kSlowHz, 0.0, 0.0, 0.0, 0.0, 0.125);
    fit(Channel::air_temperature, kWeatherHz, 0.05, 0.0, 0.2, 0.0, 0x1p-4);
    fit(Channel::air_pressure, kWeatherHz, 5.0, 0.0, 20.0, 0.0, 8.0);
    fit(Channel::relative_humidity, kWeatherHz, 0.002, 0.0, 0.02, 0.0, 0x1p-8);
    return table;
}

void fit_extra_sensors(SensorTable& table, double scale, Random& random) {
    const auto fit = [&](Channel c, double rate_hz, double noise_sd, double gain_sd, double offset_sd,
                         double resolution) {
        SensorParameters& sensor = table[index(c)];
        sensor.fitted = true;
        sensor.rate_hz = rate_hz;
        sensor.resolution = resolution;
        sensor.noise_sd = scale * noise_sd;
        sensor.gain_error = scale * gain_sd * random.normal();
        sensor.offset = scale * offset_sd * random.normal();
    };
    fit(Channel::accel_z, 400.0, 0.6, 0.005, 0.08, 0x1p-7);
    fit(Channel::pitot_pressure, 100.0, 15.0, 0.012, 5.0, 1.0);
    fit(Channel::heading, 100.0, 0.003, 0.0, 0.01, 0x1p-12);
    fit(Channel::yaw_rate, 100.0, 0.006, 0.003, 0.003, 0x1p-12);
}

}  // namespace holdfast::sim
