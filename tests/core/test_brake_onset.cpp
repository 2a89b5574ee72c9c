// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <random>
#include <vector>

#include "estimator/core/brake_onset.hpp"

namespace {

using holdfast::core::BrakeOnset;

constexpr double kResting_pa = 4e3;  // a sensor's own offset
constexpr double kRise_papers = 5e6 / 0.15;

// Pressure of a braking that begins at 2 s, is held and ends at 4 s.
double pressure_at(double time_s) {
    if (time_s < 2.0 || time_s > 4.0) return kResting_pa;
    return kResting_pa + std::min(kRise_papers * (time_s - 2.0), 5e6);
}

}  // namespace

TEST_CASE("brake pressure: onset once per braking, dated to where the pressure left its rest, seed 1") {
    const double rate_hz = GENERATE(50.0, 100.0, 400.0);
    std::mt19937_64 random(1);
    std::normal_distribution<double> noise(0.0, 8e3);
    BrakeOnset brakes;
    std::vector<double> onsets;
    for (int i = 0; i < static_cast<int>(12.0 * rate_hz); ++i) {
        const double time_s = i / rate_hz;
        const double p = pressure_at(time_s > 6.0 ? time_s - 6.0 : time_s);  // twice
        if (const auto onset = brakes.pressure(time_s, p + noise(random))) onsets.push_back(*onset);
        if (time_s > 2.1 && time_s < 3.9) REQUIRE(brakes.braking());
        if (time_s > 4.2 && time_s < 7.9) REQUIRE_FALSE(brakes.braking());
    }
    REQUIRE(onsets.size() == 2);
    CHECK(onsets[0] == Approx(2.0).margin(0.006));
    CHECK(onsets[1] == Approx(8.0).margin(0.006));
}

TEST_CASE("a drag of the brakes below onset is none, and the rest follows a slow offset") {
    BrakeOnset brakes;
    for (int i = 0; i < 2000; ++i) REQUIRE_FALSE(brakes.pressure(0.01 * i, 50.0 * i));  // 5 kPa/s
    const auto onset = brakes.pressure(20.0, 100e3 + 400e3);
    CHECK(onset.has_value());
}

TEST_CASE("without a brake pressure the deceleration beyond drag tells, seed 2") {
    std::mt19937_64 random(2);
    std::normal_distribution<double> noise(0.0, 0.5);
    BrakeOnset brakes;
    std::vector<double> onsets;
    constexpr double kDrag = -8.0;  // m/s^2 of drag at speed: no braking
    for (int i = 0; i < 2400; ++i) {
        const double time_s = i / 400.0;
        const double beyond = time_s > 2.0 && time_s < 4.0 ? -std::min(300.0 * (time_s - 2.0), 40.0) : 0.0;
        if (const auto onset = brakes.acceleration(time_s, kDrag + beyond + noise(random), kDrag))
            onsets.push_back(*onset);
    }
    REQUIRE(onsets.size() == 1);
    CHECK(onsets[0] == Approx(2.0).margin(0.008));
    CHECK_FALSE(brakes.braking());
}

TEST_CASE("where the pressure is logged the acceleration has no say") {
    BrakeOnset brakes;
    CHECK_FALSE(brakes.pressure(0.0, 0.0));
    for (int i = 1; i < 200; ++i) REQUIRE_FALSE(brakes.acceleration(0.0025 * i, -45.0, -8.0));
}

TEST_CASE("a pressure that says brakes while the car does not slow down disagrees after a second") {
    BrakeOnset brakes;
    constexpr double kDrag = -8.0;
    int disagrees_at = 0;
    for (int i = 1; i < 800 && disagrees_at == 0; ++i) {
        const double time_s = 0.0025 * i;
        (void)brakes.pressure(time_s, time_s < 0.5 ? kResting_pa : kResting_pa + 1e6);
        (void)brakes.acceleration(time_s, kDrag, kDrag);
        if (brakes.pressure_disagrees()) disagrees_at = i;
    }
    CHECK(0.0025 * disagrees_at == Approx(1.5).margin(0.02));
    brakes.pressure_lost();
    CHECK_FALSE(brakes.pressure_disagrees());
}
