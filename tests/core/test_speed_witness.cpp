// SPDX-License-Identifier: MIT
// Speed from the lap distance, and what it says of the speed sensor.
#include <catch2/catch.hpp>
#include <cmath>
#include <optional>

#include "estimator/core/speed_witness.hpp"

namespace {

using namespace holdfast::core;

constexpr double kResolution_m = 0.125, kDt_s = 0.01, kLap_m = 900.0;

double speed_at(double time_s) {
    return 60.0 + 15.0 * std::sin(0.5 * time_s);
}
double distance_at(double time_s) {
    return 60.0 * time_s + 30.0 * (1.0 - std::cos(0.5 * time_s));
}

// Three quarters of a minute over several laps. What the sensor and the distance read beside the truth may
// change.
template <class Sensor, class Distance>
SpeedWitness watched(Sensor&& sensor, Distance&& distance) {
    DistanceSpeed by_distance;
    SpeedWitness witness;
    for (int i = 0; i < 4500; ++i) {
        const double time_s = kDt_s * i;
        const double on_lap_m = std::fmod(distance(time_s), kLap_m);
        const double read_m = kResolution_m * std::round(on_lap_m / kResolution_m);
        const auto window = by_distance.add(time_s, read_m, speed_at(time_s), sensor(time_s));
        if (!window) continue;
        witness.compare(*window);
        witness.learn_noise(window->by_distance_mps - window->filter_mps);
        if (witness.sensor_drifts()) break;
    }
    return witness;
}

}  // namespace

TEST_CASE("speed from the lap distance: to its resolution, over the line too; a jump makes no speed") {
    DistanceSpeed by_distance;
    int windows = 0;
    for (int i = 0; i < 3000; ++i) {
        const double time_s = kDt_s * i;
        const double moved_m = i > 1500 ? 333.0 : 0.0;
        const double read_m =
            kResolution_m * std::round(std::fmod(distance_at(time_s) + moved_m, kLap_m) / kResolution_m);
        const auto window = by_distance.add(time_s, read_m, speed_at(time_s), speed_at(time_s) + 1.0);
        if (!window) continue;
        ++windows;
        // Two roundings of half a step over a fifth of a second.
        CHECK(std::abs(window->by_distance_mps - window->filter_mps) < kResolution_m / 0.2 + 0.01);
        CHECK(window->sensor_mps - window->filter_mps == Approx(1.0));
    }
    CHECK(windows > 130);
}

TEST_CASE("a sound sensor, one that reads a little much, and one that drifts") {
    const auto sound = watched(speed_at, distance_at);
    CHECK_FALSE(sound.sensor_drifts());
    CHECK(sound.distance_sound());
    CHECK(sound.noise_sd_mps() < 0.6);

    const auto scaled = watched([](double t) { return 1.01 * speed_at(t); }, distance_at);
    CHECK_FALSE(scaled.sensor_drifts());
    CHECK(scaled.distance_sound());

    const auto drifting =
        watched([](double t) { return speed_at(t) + 0.3 * std::max(t - 20.0, 0.0); }, distance_at);
    CHECK(drifting.sensor_drifts());
    CHECK(drifting.distance_sound());
}

TEST_CASE("a distance that stands still, or is another's, does not speak against the sensor") {
    const auto stuck = watched(speed_at, [](double t) { return distance_at(std::min(t, 20.0)); });
    CHECK_FALSE(stuck.sensor_drifts());
    CHECK_FALSE(stuck.distance_sound());

    const auto half =
        watched(speed_at, [](double t) { return t < 20.0 ? distance_at(t) : 0.5 * distance_at(t); });
    CHECK_FALSE(half.sensor_drifts());
    CHECK_FALSE(half.distance_sound());
}
