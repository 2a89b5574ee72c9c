// SPDX-License-Identifier: MIT
// One step of each filter's time update as a whole: the factored covariance against F P F^T + Q, with F taken
// by differences from the estimate's own step and Q written from the input's noise densities.
#include <catch2/catch.hpp>

#include "estimator/core/longitudinal_filter.hpp"
#include "tests/core/chassis_point.hpp"
#include "tests/dense.hpp"

namespace {

using namespace holdfast::core;
using namespace holdfast::testing;

// F by central differences of `step`, a function from the states before to the states after.
template <std::size_t N, class Step>
Matrix<N> numeric_transition(const std::array<double, N>& x, const std::array<double, N>& steps,
                             Step&& step) {
    Matrix<N> f{};
    for (std::size_t j = 0; j < N; ++j) {
        auto above = x, below = x;
        above[j] += steps[j];
        below[j] -= steps[j];
        const auto after_above = step(above), after_below = step(below);
        for (std::size_t i = 0; i < N; ++i)
            f[i][j] = (static_cast<long double>(after_above[i]) - static_cast<long double>(after_below[i])) /
                      (2.0L * static_cast<long double>(steps[j]));
    }
    return f;
}

// Load noise pushes the body up and turns it nose up at the front, nose down at the rear; the road wanders.
Matrix<kChassisCount> chassis_noise(const ChassisInput& in, const ChassisConstants& car) {
    Matrix<kChassisCount> q{};
    const double mass = car.sprung_mass_kg - in.fuel_burnt_kg;
    const auto load = [&](double density_n2s, double pitch_arm_m) {
        ChassisVector push{};
        push[kHeaveRate] = 1.0 / mass;
        push[kPitchRate] = pitch_arm_m / car.pitch_inertia_kgm2;
        q = sum(q, outer(push, push), density_n2s * in.dt_s);
    };
    load(in.load_noise_front_n2s, -car.cg_to_front_m);
    load(in.load_noise_rear_n2s, car.cg_to_rear_m);
    q[kRoadFront][kRoadFront] = in.road_front_m2ps * in.dt_s;
    q[kRoadRear][kRoadRear] = in.road_rear_m2ps * in.dt_s;
    return q;
}

}  // namespace

TEST_CASE("a step of the chassis filter carries the covariance as F P F^T + Q, seeds 1 to 4") {
    const std::uint64_t seed = GENERATE(1, 2, 3, 4);
    INFO("seed " << seed);
    ChassisInput in = small_car_input();
    in.air_speed_measured = seed % 2 == 0;
    in.dt_s = seed == 3 ? 0.05 : 0.0025;  // also the longest step there is
    const auto chassis = chassis_at_a_point(seed);
    ChassisVector steps = chassis_scales();
    for (double& step : steps) step *= 0.01;
    const auto f = numeric_transition(chassis.filter().x, steps, [&](const ChassisVector& x) {
        auto other = chassis;
        other.filter().x = x;
        other.predict(in);
        return other.filter().x;
    });
    const auto expected =
        sum(sandwich(f, covariance_of(chassis.filter())), chassis_noise(in, chassis.constants()));
    auto after = chassis;
    after.predict(in);
    CHECK(worst_difference(covariance_of(after.filter()), expected) < 1e-8);
    // The car's own states stay what they were.
    for (std::size_t i = kMovingCount; i < kChassisCount; ++i) {
        CHECK(after.filter().x[i] == chassis.filter().x[i]);
    }
}

TEST_CASE("a step of the filter along the track carries the covariance as F P F^T + Q") {
    constexpr double kDt_s = 0.0025, kDensity = 0.004;
    LongitudinalFilter filter(small_car());
    filter.restart(60.0);
    // Correlations between the states come from measurements.
    for (int i = 0; i < 200; ++i) {
        filter.predict(kDt_s, 1.0, kDensity);
        (void)filter.update_speed(60.0 + 1.1 * kDt_s * i, 4000.0, 7650.0, 0.05, 8.0);
        LongitudinalFilter::DragInput in{.drive_force_n = 4000.0,
                                         .accel_x_mps2 = 1.0,
                                         .speed_mps = 60.0,
                                         .dynamic_pressure_pa = 2200.0,
                                         .dh_front_m = -0.01,
                                         .dh_rear_m = -0.02,
                                         .missing = 0.0,
                                         .downforce_n = 7000.0,
                                         .mass_kg = 780.0,
                                         .noise_sd_n = 500.0};
        (void)filter.update_drag(in, 8.0);
    }
    // Offset and scale of the accelerometer are linearised about none.
    filter.filter().x[kAccelOffset] = filter.filter().x[kAccelGain] = 0.0;
    LongitudinalFilter::Filter::Vector steps;
    steps.fill(1e-3);
    const auto f = numeric_transition(filter.filter().x, steps, [&](const auto& x) {
        auto other = filter;
        other.filter().x = x;
        other.predict(kDt_s, 1.0, kDensity);
        return other.filter().x;
    });
    Matrix<kLongitudinalCount> q{};
    q[kSpeed][kSpeed] = kDensity * kDt_s;
    const auto expected = sum(sandwich(f, covariance_of(filter.filter())), q);
    REQUIRE(std::abs(filter.filter().covariance(kSpeed, kAccelOffset)) > 0.0);
    filter.predict(kDt_s, 1.0, kDensity);
    CHECK(worst_difference(covariance_of(filter.filter()), expected) < 1e-9);
}
