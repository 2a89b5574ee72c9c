// SPDX-License-Identifier: MIT
#include "estimator/core/chassis_filter.hpp"

#include <algorithm>
#include <cmath>

#include "estimator/core/small_math.hpp"

namespace holdfast::core {
namespace {

constexpr double kWheelCentreHeight_m = 0.32;  // common practice, no source; its error is in transfer_sd

// What is believed of a car before its first straight: wide enough for open-wheel cars and heavy closed ones
// (orders of magnitude: downforce areas of 1 to 3 m^2 an axle, flaps of 0.4 to 1 m^2). Standard deviations.
constexpr double kAreaPrior_m2 = 1.8;
constexpr double kAreaPriorSd_m2 = 1.5;
constexpr double kSlopePrior_m = -6.0;  // m^2/m: areas grow as the car comes down, some 0.4 % each millimetre
constexpr double kSlopePriorSd_m = 5.0;
constexpr double kCurvePriorSd = 100.0;       // m^2/m^2: an optimum of the ride height some 30 mm wide
constexpr double kWindPriorSd_mps = 2.0;      // common practice, no source
constexpr double kWindLeastSpeed_mps = 15.0;  // below, air forces do not matter and the ratio would run away
constexpr double kGustSd = 0.015;             // relative to dynamic pressure: 0.6 m/s at 80 m/s
constexpr double kGustMemory_s = 2.0;
constexpr double kPitotGainSd = 0.004;  // what the calibration leaves
constexpr double kPitotGainMemory_s = 1e4;
constexpr double kFlapPrior_m2 = 0.70;
constexpr double kFlapPriorSd_m2 = 0.30;
constexpr double kFlapFrontPriorSd_m2 = 0.12;
// Less than such sensors have: with 0.1 a first closing is judged beside areas that still find their way.
constexpr double kAccelZOffsetSd_mps2 = 0.03;
constexpr double kLoadOffsetSensorSd_n = 60.0;  // an axle's two load sensors; common practice, no source

// Drift of the parameters, standard deviation after one second.
constexpr double kAreaDrift_m2 = 0.004;
constexpr double kWindDrift_mps = 0.10;
constexpr double kTurnForgets_rad =
    1.0;                               // an unseen turn by so much leaves 1/e of what was known of the wind
constexpr double kSlopeDrift_m = 0.4;  // m^2/m: what a parabola over the ride height leaves out
constexpr double kLoadOffsetDrift_n = 0.5;
constexpr double kFlapDrift_m2 = 0.0005;

}  // namespace

ChassisConstants::ChassisConstants(const Car& car) {
    const double unsprung_front = 2.0 * car.front.unsprung_mass_kg.value;
    const double unsprung_rear = 2.0 * car.rear.unsprung_mass_kg.value;
    const double mass = car.mass_kg.value;
    const double share = car.front_weight_share.value;
    const double sprung_front = mass * share - unsprung_front;
    const double sprung_rear = mass * (1.0 - share) - unsprung_rear;
    sprung_mass_kg = sprung_front + sprung_rear;
    weight_front_n = sprung_front * kGravity;
    weight_rear_n = sprung_rear * kGravity;
    const double share_part = square(mass * car.front_weight_share.sd);
    weight_sd_front_n = kGravity * std::sqrt(square(share * car.mass_kg.sd) + share_part +
                                             square(2.0 * car.front.unsprung_mass_kg.sd));
    weight_sd_rear_n = kGravity * std::sqrt(square((1.0 - share) * car.mass_kg.sd) + share_part +
                                            square(2.0 * car.rear.unsprung_mass_kg.sd));
    cg_to_front_m = car.wheelbase_m * sprung_rear / sprung_mass_kg;
    cg_to_rear_m = car.wheelbase_m - cg_to_front_m;
    pitch_inertia_kgm2 = car.pitch_inertia_kgm2.value;
    const double unsprung_moment = (unsprung_front + unsprung_rear) * kWheelCentreHeight_m;
    transfer_per_accel_kg = (mass * car.cg_height_m.value - unsprung_moment) / car.wheelbase_m;
    link_per_force = car.cg_height_m.value / car.wheelbase_m;
    transfer_sd = std::hypot(car.cg_height_m.sd / car.cg_height_m.value, 0.06);
    anti_dive = car.front.anti_brake_share.value;
    anti_lift = car.rear.anti_brake_share.value;
    anti_squat = car.rear.anti_squat_share.value;
}

ChassisFilter::ChassisFilter(const Car& car) : constants_(car) {
    Filter::Vector variance{};
    variance[kHeave] = variance[kRoadFront] = variance[kRoadRear] = square(0.02);
    variance[kHeaveRate] = square(0.2);
    variance[kPitch] = square(0.01);
    variance[kPitchRate] = square(0.1);
    variance[kAccelZOffset] = square(kAccelZOffsetSd_mps2);
    variance[kAreaFront] = variance[kAreaRear] = square(kAreaPriorSd_m2);
    variance[kSlopeFront] = variance[kSlopeRear] = square(kSlopePriorSd_m);
    variance[kCurveFront] = variance[kCurveRear] = square(kCurvePriorSd);
    variance[kTransferFront] = square(std::hypot(constants_.transfer_sd, car.front.anti_brake_share.sd));
    variance[kTransferRear] = square(std::hypot(constants_.transfer_sd, car.rear.anti_brake_share.sd));
    variance[kLoadOffsetFront] = square(std::hypot(constants_.weight_sd_front_n, kLoadOffsetSensorSd_n));
    variance[kLoadOffsetRear] = square(std::hypot(constants_.weight_sd_rear_n, kLoadOffsetSensorSd_n));
    variance[kWindAlong] = variance[kWindAcross] = square(kWindPriorSd_mps);
    variance[kGust] = square(kGustSd);
    variance[kFlapAreaFront] = square(kFlapFrontPriorSd_m2);
    variance[kFlapAreaRear] = square(kFlapPriorSd_m2);
    filter_.set_diagonal(variance);
    filter_.x[kAreaFront] = filter_.x[kAreaRear] = kAreaPrior_m2;
    filter_.x[kSlopeFront] = filter_.x[kSlopeRear] = kSlopePrior_m;
    filter_.x[kFlapAreaRear] = kFlapPrior_m2;
}

double ChassisFilter::front_area_m2(double dh_m) const {
    return filter_.x[kAreaFront] + dh_m * (filter_.x[kSlopeFront] + 0.5 * dh_m * filter_.x[kCurveFront]);
}
double ChassisFilter::rear_area_m2(double dh_m) const {
    return filter_.x[kAreaRear] + dh_m * (filter_.x[kSlopeRear] + 0.5 * dh_m * filter_.x[kCurveRear]);
}

void ChassisFilter::predict(const ChassisInput& in) {
    auto& x = filter_.x;
    const double dt = in.dt_s;
    const double mass = constants_.sprung_mass_kg - in.fuel_burnt_kg;
    // Wind, [wind]: against the car by course; air forces go with the square of the air speed.
    const double speed = std::max(in.speed_mps, kWindLeastSpeed_mps);
    const double cosine = std::cos(in.course_rad);
    const double sine = std::sin(in.course_rad);
    double per_along = 0.0;
    double per_across = 0.0;
    wind_factor_ = 1.0 + x[kGust];
    if (!in.air_speed_measured) {
        headwind_mps_ = x[kWindAlong] * cosine + x[kWindAcross] * sine;
        const double air_share = 1.0 + headwind_mps_ / speed;
        wind_factor_ += air_share * air_share - 1.0;
        per_along = 2.0 * air_share * cosine / speed;
        per_across = 2.0 * air_share * sine / speed;
    }
    factor_per_along_ = per_along;
    factor_per_across_ = per_across;
    wind_factor_ = std::clamp(wind_factor_, 0.5, 2.0);
    const double q = in.dynamic_pressure_pa * wind_factor_;

    // Forces left over at each axle, [axle-balance]: what accelerates the sprung mass.
    const double transfer = constants_.transfer_per_accel_kg * in.accel_x_mps2;
    const double link = constants_.link_per_force * in.transfer_force_n;
    const bool braking = in.transfer_force_n < 0.0;
    const double anti_rear = braking ? constants_.anti_lift : constants_.anti_squat;
    const double anti_front = braking ? constants_.anti_dive : 0.0;
    const double fuel_weight = 0.5 * kGravity * in.fuel_burnt_kg;
    const double known_front =
        in.load_front_n - constants_.weight_front_n + fuel_weight + transfer - anti_front * link;
    const double known_rear =
        in.load_rear_n - constants_.weight_rear_n + fuel_weight - transfer + anti_rear * link;

    // Residual force of an axle by state (front and rear part of each state's effect).
    std::array<double, kChassisCount> front{};
    std::array<double, kChassisCount> rear{};
    front[kAreaFront] = -q;
    rear[kAreaRear] = -q;
    front[kSlopeFront] = -q * in.dh_front_m;
    rear[kSlopeRear] = -q * in.dh_rear_m;
    front[kCurveFront] = 0.5 * in.dh_front_m * front[kSlopeFront];
    rear[kCurveRear] = 0.5 * in.dh_rear_m * rear[kSlopeRear];
    front[kTransferFront] = transfer;
    rear[kTransferRear] = -transfer;
    front[kLoadOffsetFront] = -1.0;
    rear[kLoadOffsetRear] = -1.0;
    front[kFlapAreaFront] = q * in.missing;
    rear[kFlapAreaRear] = q * in.missing;

    // All air forces scale with the wind together.
    double air_front = 0.0;
    double air_rear = 0.0;
    for (const ChassisState p : {kAreaFront, kAreaRear, kSlopeFront, kSlopeRear, kCurveFront, kCurveRear,
                                 kFlapAreaFront, kFlapAreaRear}) {
        air_front += front[p] * x[p];
        air_rear += rear[p] * x[p];
    }
    front[kGust] = air_front / wind_factor_;
    rear[kGust] = air_rear / wind_factor_;
    front[kWindAlong] = front[kGust] * per_along;
    rear[kWindAlong] = rear[kGust] * per_along;
    front[kWindAcross] = front[kGust] * per_across;
    rear[kWindAcross] = rear[kGust] * per_across;

    const double a = constants_.cg_to_front_m;
    const double b = constants_.cg_to_rear_m;
    const double inertia = constants_.pitch_inertia_kgm2;
    double heave_accel = (known_front + known_rear) / mass;
    double pitch_accel = (b * known_rear - a * known_front) / inertia;
    for (std::size_t p = kMovingCount; p < kChassisCount; ++p) {
        step_.heave_accel_by_state[p] = (front[p] + rear[p]) / mass;
        step_.pitch_accel_by_state[p] = (b * rear[p] - a * front[p]) / inertia;
        if (p == kWindAlong || p == kWindAcross || p == kGust) continue;  // in q
        heave_accel += step_.heave_accel_by_state[p] * x[p];
        pitch_accel += step_.pitch_accel_by_state[p] * x[p];
    }
    const double front_per_rear = x[kFlapAreaFront] / std::max(x[kFlapAreaRear], 0.1);
    step_.dt_s = dt;
    step_.heave_accel_mps2 = heave_accel;
    step_.heave_accel_per_missing_area = q * (1.0 + front_per_rear) / mass;
    step_.pitch_accel_per_missing_area = q * (b - a * front_per_rear) / inertia;

    const double half = 0.5 * dt * dt;
    x[kHeave] += dt * x[kHeaveRate] + half * heave_accel;
    x[kHeaveRate] += dt * heave_accel;
    x[kPitch] += dt * x[kPitchRate] + half * pitch_accel;
    x[kPitchRate] += dt * pitch_accel;

    // Covariance, [bias-partition]. Each moving state follows states behind it only, so that the transition
    // is unit upper triangular like U: their product is the new U, and D stays. The noise then comes on top.
    for (std::size_t j = kHeaveRate; j < kMovingCount; ++j) {
        auto& column = filter_.column(j);
        column[kHeave] += dt * column[kHeaveRate];
        if (j >= kPitchRate) column[kPitch] += dt * column[kPitchRate];
    }
    for (std::size_t j = kMovingCount; j < kChassisCount; ++j) {
        auto& column = filter_.column(j);
        double heave = 0.0;
        double pitch = 0.0;
        for (std::size_t p = kMovingCount; p <= j; ++p) {
            heave += step_.heave_accel_by_state[p] * column[p];
            pitch += step_.pitch_accel_by_state[p] * column[p];
        }
        column[kHeave] += dt * column[kHeaveRate] + half * heave;
        column[kHeaveRate] += dt * heave;
        column[kPitch] += dt * column[kPitchRate] + half * pitch;
        column[kPitchRate] += dt * pitch;
    }
    filter_.add_rank_one(std::array{0.0, 0.0, 0.0, 0.0, 0.0, 1.0}, in.road_rear_m2ps * dt);
    filter_.add_rank_one(std::array{0.0, 0.0, 0.0, 0.0, 1.0}, in.road_front_m2ps * dt);
    filter_.add_rank_one(std::array{0.0, 1.0 / mass, 0.0, -a / inertia}, in.load_noise_front_n2s * dt);
    filter_.add_rank_one(std::array{0.0, 1.0 / mass, 0.0, b / inertia}, in.load_noise_rear_n2s * dt);
}

ChassisFilter::Kept ChassisFilter::drift(double elapsed_s, bool air_speed_measured,
                                         double unseen_turn_radps) {
    Kept kept;
    // From the last state to the first: each term's chain of divisions then runs in the shadow of the one
    // before.
    if (filter_.diagonal(kFlapAreaRear) > 0.0) {
        filter_.add_noise(kFlapAreaRear, square(kFlapDrift_m2) * elapsed_s);
    }
    const double memory_s = air_speed_measured ? kPitotGainMemory_s : kGustMemory_s;
    const double keep = std::exp(-elapsed_s / memory_s);
    const double gust_sd = air_speed_measured ? kPitotGainSd : kGustSd;
    kept.gust = keep;
    filter_.x[kGust] *= keep;
    filter_.scale_state(kGust, keep);
    filter_.add_noise(kGust, square(gust_sd) * (1.0 - keep * keep));
    if (!air_speed_measured) {
        const double wind_keep = std::exp(-elapsed_s * unseen_turn_radps / kTurnForgets_rad);
        kept.wind_along = wind_keep;
        filter_.x[kWindAlong] *= wind_keep;
        filter_.scale_state(kWindAlong, wind_keep);
        filter_.add_noise(kWindAcross, square(kWindDrift_mps) * elapsed_s);
        filter_.add_noise(kWindAlong, square(kWindPriorSd_mps) * (1.0 - wind_keep * wind_keep) +
                                          square(kWindDrift_mps) * elapsed_s);
    }
    filter_.add_noise(kLoadOffsetRear, square(kLoadOffsetDrift_n) * elapsed_s);
    filter_.add_noise(kLoadOffsetFront, square(kLoadOffsetDrift_n) * elapsed_s);
    filter_.add_noise(kSlopeRear, square(kSlopeDrift_m) * elapsed_s);
    filter_.add_noise(kSlopeFront, square(kSlopeDrift_m) * elapsed_s);
    filter_.add_noise(kAreaRear, square(kAreaDrift_m2) * elapsed_s);
    filter_.add_noise(kAreaFront, square(kAreaDrift_m2) * elapsed_s);
    return kept;
}

void ChassisFilter::wind_is_measured() {
    for (const ChassisState p : {kWindAlong, kWindAcross}) {
        filter_.reset_state(p, 0.0);
        filter_.x[p] = 0.0;
    }
    filter_.reset_state(kGust, square(kPitotGainSd));
    filter_.x[kGust] = 0.0;
}

void ChassisFilter::wind_is_unknown() {
    for (const ChassisState p : {kWindAlong, kWindAcross}) filter_.reset_state(p, square(kWindPriorSd_mps));
    filter_.reset_state(kGust, square(kGustSd));
    filter_.x[kGust] = 0.0;
}

void ChassisFilter::restart_motion(double dh_front_m, double dh_rear_m, double x_front_m, double x_rear_m) {
    // Heave and pitch from the heights alone, road taken as level; its uncertainty is the whole road's.
    const double slope = (dh_rear_m - dh_front_m) / (x_front_m - x_rear_m);  // nose down positive
    const double from_cg_front = x_front_m + constants_.cg_to_front_m;
    filter_.reset_state(kHeave, square(0.02));
    filter_.reset_state(kHeaveRate, square(0.2));
    filter_.reset_state(kPitch, square(0.01));
    filter_.reset_state(kPitchRate, square(0.1));
    filter_.reset_state(kRoadFront, square(0.02));
    filter_.reset_state(kRoadRear, square(0.02));
    filter_.x[kPitch] = slope;
    filter_.x[kPitchRate] = filter_.x[kHeaveRate] = 0.0;
    filter_.x[kHeave] = dh_front_m + slope * from_cg_front;
    filter_.x[kRoadFront] = filter_.x[kRoadRear] = 0.0;
}

}  // namespace holdfast::core
