// SPDX-License-Identifier: MIT
// What the engine says of now.
#include <algorithm>
#include <cmath>

#include "estimator/core/engine.hpp"
#include "estimator/core/small_math.hpp"

namespace holdfast::core {
namespace {

// Force of an axle in weights of the car that keeps its sign and that no state stands for (transfer, links,
// hills); found on simulated cars by the bands' coverage.
constexpr double kAxleForceLeft = 0.0055;
constexpr double kSnapshotEvery_s = 1.0;
constexpr double kLoadGainSd = 0.01;  // a load sensor's gain against the weight it was zeroed with
constexpr double kDragWhole =
    0.012;  // mass, accelerometer and drive force together, relative to the drag area
constexpr double kSlowFrom_mps = 20.0;

}  // namespace

bool Engine::take_slow_snapshot(SlowSnapshot& out) {
    const double time_s = static_cast<double>(time_ns_) * 1e-9;
    if (tracker_.bank().running() || time_s < next_snapshot_s_) return false;
    next_snapshot_s_ = time_s + kSnapshotEvery_s;
    auto& filter = chassis_.filter();
    out.time_s = time_s;
    for (std::size_t i = 0; i < kSlowCount; ++i) {
        out.mean[i] = filter.x[kMovingCount + i];
        out.kept[i] = filter.kept(kMovingCount + i);
        out.added[i] = filter.added(kMovingCount + i);
        for (std::size_t j = 0; j <= i; ++j) {
            out.covariance[i * kSlowCount + j] = out.covariance[j * kSlowCount + i] =
                filter.covariance(kMovingCount + i, kMovingCount + j);
        }
    }
    filter.forget_changes();
    return true;
}

const Estimate& Engine::estimate() {
    const auto& filter = chassis_.filter();
    const auto& x = filter.x;
    const bool closing = tracker_.bank().running();
    const double q = std::max(measured_pressure_pa(), 1e-3);
    const double wind_factor = chassis_.wind_factor();
    const double dh_front = front_heights_.dh_m();
    const double dh_rear = rear_heights_.dh_m();

    Estimate& e = estimate_;
    e.time_ns = time_ns_;
    e.speed_mps = longitudinal_.speed_mps();
    e.air_speed_mps = e.speed_mps * std::sqrt(pitot_ratio_);
    e.air_density_kgpm3 = air_density_kgpm3_;
    e.flap_area_m2 = {x[kFlapAreaRear], std::sqrt(closing ? tracker_.bank().flap_prior_variance()
                                                          : filter.variance(kFlapAreaRear))};
    MissingNow missing;
    if (closing) {
        missing = tracker_.missing();
    } else {
        missing.share = std::max(missing_open_, tracker_.stays_share());
        missing.area_m2 = missing_open_ * x[kFlapAreaRear];
    }
    const double front_ratio = x[kFlapAreaFront] / std::max(x[kFlapAreaRear], 0.1);

    // Areas now as linear forms of the states; the bank's mixture moves them from the base path.
    ChassisFilter::Filter::Vector front{}, rear{};
    front[kAreaFront] = 1.0;
    front[kSlopeFront] = dh_front;
    front[kCurveFront] = 0.5 * square(dh_front);
    rear[kAreaRear] = 1.0;
    rear[kSlopeRear] = dh_rear;
    rear[kCurveRear] = 0.5 * square(dh_rear);
    double area_front = chassis_.front_area_m2(dh_front);
    double area_rear = chassis_.rear_area_m2(dh_rear);
    if (closing) {
        for (const ChassisState p : {kAreaFront, kSlopeFront, kCurveFront})
            area_front += tracker_.mean_deviation(p, filter) * front[p];
        for (const ChassisState p : {kAreaRear, kSlopeRear, kCurveRear})
            area_rear += tracker_.mean_deviation(p, filter) * rear[p];
        area_front -= front_ratio * missing.area_m2;
        area_rear -= missing.area_m2;
    } else {
        front[kFlapAreaFront] = -missing_open_;
        rear[kFlapAreaRear] = -missing_open_;
        area_front += front[kFlapAreaFront] * x[kFlapAreaFront];
        area_rear += rear[kFlapAreaRear] * x[kFlapAreaRear];
    }
    const double air_front = area_front, air_rear = area_rear;
    // In the reference that is measured: wind, where it is not, stays in the areas.
    area_front *= wind_factor;
    area_rear *= wind_factor;
    // Wind where the air speed is not measured, and the gain of the load sensors, move an area as a whole.
    const double wind =
        have_pitot_ ? 0.0 : 2.0 * std::sqrt(wind_variance_m2ps2_) / std::max(e.speed_mps, 5.0);
    const double whole = std::hypot(have_pitot_ ? pitot_calibration_.scale_sd() : wind, kLoadGainSd);
    const auto sd_of = [&](const ChassisFilter::Filter::Vector& form, double area, double missing_sd) {
        return std::sqrt(filter.variance_of(form) + square(whole * area) + square(missing_sd));
    };
    e.cla_front_m2 = {area_front, sd_of(front, area_front, front_ratio * missing.area_sd_m2)};
    e.cla_rear_m2 = {area_rear, sd_of(rear, area_rear, missing.area_sd_m2)};
    const double left_m2 = kAxleForceLeft * mass_kg() * kGravity / q;
    const double floor_variance = square(left_m2);
    e.cla_front_m2.sd = std::hypot(e.cla_front_m2.sd, left_m2);
    e.cla_rear_m2.sd = std::hypot(e.cla_rear_m2.sd, left_m2);
    e.front_other_variance =
        floor_variance + square(whole * area_front) + square(front_ratio * missing.area_sd_m2);
    e.rear_other_variance = floor_variance + square(whole * area_rear) + square(missing.area_sd_m2);
    if (closing) {
        front[kFlapAreaFront] = -missing.share;
        rear[kFlapAreaRear] = -missing.share;
    }
    for (std::size_t i = 0; i < kSlowCount; ++i) {
        e.front_by_slow[i] = wind_factor * front[kMovingCount + i];
        e.rear_by_slow[i] = wind_factor * rear[kMovingCount + i];
    }
    const auto by_wind = [&](ChassisState state, double factor) {
        e.front_by_slow[slow(state)] = air_front * factor;
        e.rear_by_slow[slow(state)] = air_rear * factor;
    };
    by_wind(kWindAlong, chassis_.wind_factor_per_along());
    by_wind(kWindAcross, chassis_.wind_factor_per_across());
    by_wind(kGust, 1.0);
    e.cda_m2 = longitudinal_.drag_area(dh_front, dh_rear, missing.share, missing.share_sd, q,
                                       mass_kg() * kGravity + q * (area_front + area_rear));
    e.cda_m2.value *= pressure_for_drag_pa() / q;
    e.cda_m2.sd = std::hypot(e.cda_m2.sd, std::hypot(wind, kDragWhole) * e.cda_m2.value);
    e.attached = {std::clamp(1.0 - missing.share, 0.0, 1.0), missing.share_sd};
    e.downforce_front_n = {q * area_front, q * e.cla_front_m2.sd};
    e.downforce_rear_n = {q * area_rear, q * e.cla_rear_m2.sd};
    e.drag_n = {q * e.cda_m2.value, q * e.cda_m2.sd};

    std::uint32_t flags = 0;
    if (!converged()) flags |= kNotConverged;
    if (stale_ != 0) flags |= kStale;
    if (!have_pitot_) flags |= kGroundReference;
    if (temperature_k_ == 0.0) flags |= kStandardAir;
    if (intake_.health()[index(Channel::drive_force)].samples == 0) flags |= kDragByCoasting;
    if (e.speed_mps < kSlowFrom_mps) flags |= kSlow;
    if (flap_.phase() != FlapPhase::closed) flags |= kFlapOpen;
    if (closing) flags |= kReattaching;
    for (const ChannelHealth& h : intake_.health()) {
        if (h.trust == Trust::distrusted) flags |= kSensorDistrusted;
    }
    e.flags = flags;
    return e;
}

}  // namespace holdfast::core
