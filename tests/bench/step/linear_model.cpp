// SPDX-License-Identifier: MIT
#include "tests/bench/step/linear_model.hpp"

#include <cmath>
#include <random>

#include "estimator/core/measurements/ride_height.hpp"

namespace holdfast::bench {
namespace {

using namespace core;

constexpr double kStep_s = 1.0 / 400.0;
constexpr double kLoadNoise_n2s =
    2.0 * 50.0 * 50.0 * kStep_s + 200.0;  // two sensors of 50 N, and the model's
constexpr double kRoad_m2ps = 3e-5;
constexpr double kHeightSd_m = 0.3e-3;
constexpr double kSensorFront_m = 0.25;  // forward of the front axle
constexpr double kSensorRear_m = -3.65;
constexpr double kHeave_m = 0.005;  // slow rise and fall of the car
constexpr double kHeave_radps = 1.5;

// An invented open-wheel car.
Car make_car() {
    Car car;
    car.mass_kg = {800.0, 4.0};
    car.wheelbase_m = 3.5;
    car.front_weight_share = {0.455, 0.002};
    car.cg_height_m = {0.29, 0.015};
    car.pitch_inertia_kgm2 = {1050.0, 105.0};
    car.front.unsprung_mass_kg = car.rear.unsprung_mass_kg = {20.0, 1.0};
    car.front.anti_brake_share = car.rear.anti_brake_share = {0.15, 0.03};
    return car;
}

ChassisInput make_input(const ChassisConstants& car, const State& truth, double time_s, double noise_front_n,
                        double noise_rear_n) {
    ChassisInput in;
    in.dt_s = kStep_s;
    in.speed_mps = 60.0 + 4.0 * time_s;
    in.dynamic_pressure_pa = 0.6 * in.speed_mps * in.speed_mps;
    in.dh_front_m = in.dh_rear_m = truth[kHeave];
    in.missing = 0.5 - 0.5 * std::cos(2.0 * time_s);
    in.load_noise_front_n2s = in.load_noise_rear_n2s = kLoadNoise_n2s;
    in.road_front_m2ps = in.road_rear_m2ps = kRoad_m2ps;
    // Loads that keep the car on its slow path: what the axle carries at rest and the air's share.
    const double q = in.dynamic_pressure_pa;
    in.load_front_n =
        car.weight_front_n + truth[kLoadOffsetFront] + noise_front_n +
        q * (truth[kAreaFront] + truth[kSlopeFront] * in.dh_front_m - in.missing * truth[kFlapAreaFront]);
    in.load_rear_n =
        car.weight_rear_n + truth[kLoadOffsetRear] + noise_rear_n +
        q * (truth[kAreaRear] + truth[kSlopeRear] * in.dh_rear_m - in.missing * truth[kFlapAreaRear]);
    return in;
}

std::array<State, kStates> process_noise(const ChassisConstants& car) {
    const double a = car.cg_to_front_m, b = car.cg_to_rear_m;
    const double m = car.sprung_mass_kg, inertia = car.pitch_inertia_kgm2;
    const double load = kLoadNoise_n2s * kStep_s;
    std::array<State, kStates> q{};
    q[kHeaveRate][kHeaveRate] = 2.0 * load / (m * m);
    q[kPitchRate][kPitchRate] = (a * a + b * b) * load / (inertia * inertia);
    q[kHeaveRate][kPitchRate] = q[kPitchRate][kHeaveRate] = (b - a) * load / (m * inertia);
    q[kRoadFront][kRoadFront] = q[kRoadRear][kRoadRear] = kRoad_m2ps * kStep_s;
    return q;
}

double dot(const State& a, const State& b) {
    double sum = 0.0;
    for (std::size_t i = 0; i < kStates; ++i) sum += a[i] * b[i];
    return sum;
}

// F x, as ModelStep describes it.
State transition(const ModelStep& step, const State& x) {
    const double heave_accel = dot(step.heave_accel_by_state, x);
    const double pitch_accel = dot(step.pitch_accel_by_state, x);
    State out = x;
    out[kHeave] += kStep_s * x[kHeaveRate] + 0.5 * kStep_s * kStep_s * heave_accel;
    out[kHeaveRate] += kStep_s * heave_accel;
    out[kPitch] += kStep_s * x[kPitchRate] + 0.5 * kStep_s * kStep_s * pitch_accel;
    out[kPitchRate] += kStep_s * pitch_accel;
    return out;
}

}  // namespace

LinearModel make_linear_model(Measurements which, std::size_t steps, std::uint64_t seed) {
    std::mt19937_64 random(seed);
    std::normal_distribution<double> normal;
    LinearModel model;
    model.car = make_car();
    ChassisFilter chassis(model.car);
    const ChassisConstants& constants = chassis.constants();
    ChassisFilter::Filter& filter = chassis.filter();
    model.x = filter.x;
    for (std::size_t i = 0; i < kStates; ++i) model.variance[i] = filter.variance(i);
    model.process_noise = process_noise(constants);

    for (const auto& [x_m, road] : {std::pair{kSensorFront_m, kRoadFront}, {kSensorRear_m, kRoadRear}}) {
        const RideHeightModel height{x_m + constants.cg_to_front_m, road};
        model.measurements.push_back({height.J_height_state(), kHeightSd_m * kHeightSd_m});
    }
    if (which == Measurements::heights_and_others) {
        for (int row = 0; row < 10; ++row) {
            MeasurementModel m{{}, 1.0};
            for (std::size_t i = 0; i < kStates; ++i) m.h[i] = normal(random) / std::sqrt(model.variance[i]);
            model.measurements.push_back(m);
        }
    }

    State truth = model.x;
    for (std::size_t i = kMovingCount; i < kStates; ++i) {
        if (i != kWindAlong && i != kWindAcross && i != kGust)
            truth[i] += 0.3 * normal(random) * std::sqrt(model.variance[i]);
    }
    const double load_sd_n = std::sqrt(kLoadNoise_n2s / kStep_s);
    for (std::size_t k = 0; k < steps; ++k) {
        const double time_s = kStep_s * static_cast<double>(k + 1);
        truth[kHeave] = kHeave_m * std::sin(kHeave_radps * time_s);
        truth[kHeaveRate] = kHeave_m * kHeave_radps * std::cos(kHeave_radps * time_s);
        ModelStep step;
        step.input =
            make_input(constants, truth, time_s, load_sd_n * normal(random), load_sd_n * normal(random));
        const State before = filter.x;
        chassis.predict(step.input);
        step.heave_accel_by_state = chassis.last_step().heave_accel_by_state;
        step.pitch_accel_by_state = chassis.last_step().pitch_accel_by_state;
        const State linear = transition(step, before);
        for (std::size_t i = 0; i < kStates; ++i) step.known[i] = filter.x[i] - linear[i];
        for (const MeasurementModel& m : model.measurements) {
            const double measured = dot(m.h, truth) + std::sqrt(m.noise_variance) * normal(random);
            step.measured.push_back(measured);
            const double innovation = measured - dot(m.h, filter.x);
            (void)filter.expect(m.h, m.noise_variance);
            filter.apply(innovation);
        }
        model.steps.push_back(std::move(step));
    }
    return model;
}

}  // namespace holdfast::bench
