// SPDX-License-Identifier: MIT
// A coast-down in closed form, handed to the filter along the track as a sensor would log it: it has to find
// the drag area that made it. Form of SAE J2263 and ISO 10521-1, F0 + F2 V^2 (F1 = 0):
//   v(t) = sqrt(F0/F2) tan(atan(v0 sqrt(F2/F0)) - t sqrt(F0 F2) / m)
#include <catch2/catch.hpp>
#include <cmath>
#include <random>

#include "estimator/core/longitudinal_filter.hpp"

namespace {

using namespace holdfast::core;

constexpr double kMass_kg = 1500.0, kF0_n = 150.0, kF2_kgpm = 0.4, kStart_mps = 30.0;
constexpr double kGravity = 9.80665, kDensity = 1.225;

double coasting_speed(double time_s) {
    const double scale = std::sqrt(kF0_n / kF2_kgpm);
    return scale * std::tan(std::atan(kStart_mps / scale) - time_s * std::sqrt(kF0_n * kF2_kgpm) / kMass_kg);
}

double coasting_accel(double speed) {
    return -(kF0_n + kF2_kgpm * speed * speed) / kMass_kg;
}

}  // namespace

TEST_CASE("coast-down: the closed form itself") {
    // Computed with scipy 1.10.1.
    CHECK(coasting_speed(10.0) == Approx(26.849258).margin(1e-6));
    CHECK(coasting_speed(30.0) == Approx(21.720693).margin(1e-6));
    CHECK(coasting_speed(193.183057) == Approx(0.0).margin(1e-6));
}

TEST_CASE("coast-down: the filter finds speed, drag area and the accelerometer's offset, seed 3") {
    constexpr double kOffset_mps2 = 0.08, kAccelNoise = 0.2, kSpeedNoise = 0.04, kDt_s = 0.01;
    Car car;
    car.mass_kg = {kMass_kg, 0.0};
    car.rolling_resistance = {kF0_n / (kMass_kg * kGravity), 0.0};
    LongitudinalFilter filter(car);
    filter.drift(0.0, 0.0, false, 0.0);  // still air
    filter.restart(kStart_mps);
    std::mt19937_64 random(3);
    std::normal_distribution<double> normal;
    for (int i = 1; i <= 4000; ++i) {
        const double time_s = kDt_s * i;
        const double speed = coasting_speed(time_s);
        const double accel = coasting_accel(speed) + kOffset_mps2 + kAccelNoise * normal(random);
        filter.predict(kDt_s, accel, kAccelNoise * kAccelNoise * kDt_s);
        (void)filter.update_speed(speed + kSpeedNoise * normal(random), 0.0, kMass_kg * kGravity, kSpeedNoise,
                                  8.0);
        LongitudinalFilter::DragInput in;
        in.accel_x_mps2 = accel;
        in.speed_mps = speed;
        in.dynamic_pressure_pa = 0.5 * kDensity * speed * speed;
        in.mass_kg = kMass_kg;
        in.noise_sd_n = kMass_kg * kAccelNoise;
        (void)filter.update_drag(in, 5.0);
        if (i == 1000) CHECK(filter.speed_mps() == Approx(26.849258).margin(0.05));
        if (i == 3000) CHECK(filter.speed_mps() == Approx(21.720693).margin(0.05));
    }
    const double truth_m2 = 2.0 * kF2_kgpm / kDensity;
    const Quantity found = filter.drag_area(0.0, 0.0, 0.0, 0.0, 300.0, kMass_kg * kGravity);
    INFO("drag area " << found.value << " +- " << found.sd << ", true " << truth_m2);
    CHECK(std::abs(found.value - truth_m2) < 3.0 * found.sd);
    CHECK(found.sd < 0.05);  // from 0.6 before
    // Coasting alone hardly tells the accelerometer's offset from its scale.
    const double offset_sd = std::sqrt(filter.filter().variance(kAccelOffset));
    CHECK(std::abs(filter.filter().x[kAccelOffset] - kOffset_mps2) < 3.0 * offset_sd);
    CHECK(offset_sd < 0.05);
    // It has no error of scale, and its noise is not taken for one.
    CHECK(std::abs(filter.filter().x[kAccelGain]) < 0.02);
}
