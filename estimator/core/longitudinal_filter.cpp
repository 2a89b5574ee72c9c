// SPDX-License-Identifier: MIT
#include "estimator/core/longitudinal_filter.hpp"

#include <algorithm>
#include <cmath>

#include "estimator/core/small_math.hpp"

namespace holdfast::core {
namespace {

constexpr double kDragAreaPrior_m2 = 1.2, kDragAreaPriorSd_m2 = 0.6;
constexpr double kDragFlapPrior_m2 = 0.20, kDragFlapPriorSd_m2 = 0.15;
// m^2/m: drag grows with the downforce as the car comes down (its induced part goes with the square of the
// downforce area: order of magnitude).
constexpr double kDragSlopePrior_m = -1.0, kDragSlopePriorSd_m = 1.2;
constexpr double kSlipPrior = 0.005, kSlipPriorSd = 0.004;
constexpr double kAccelOffsetSd_mps2 = 0.10;
constexpr double kAccelGainSd = 0.007;
constexpr double kDriveGainSd = 0.025;
constexpr double kDragDrift_m2 = 0.002;  // after one second
constexpr double kAccelOffsetDrift_mps2 = 0.001;
constexpr double kWindPriorSd_mps = 2.0;  // common practice, no source
constexpr double kWindDrift_mps = 0.10;
constexpr double kTurnForgets_rad = 1.0;      // so much leaves 1/e of what was known of the wind
constexpr double kWindLeastSpeed_mps = 15.0;  // below, the ratio would run away

// Air speed over ground speed, [drag-wind].
double air_share(double wind_mps, double speed_mps) {
    return 1.0 + wind_mps / std::max(speed_mps, kWindLeastSpeed_mps);
}

}  // namespace

LongitudinalFilter::LongitudinalFilter(const Car& car) : rolling_resistance_(car.rolling_resistance) {
    Filter::Vector variance{};
    variance[kSpeed] = square(30.0);
    variance[kDragArea] = square(kDragAreaPriorSd_m2);
    variance[kDragFlap] = square(kDragFlapPriorSd_m2);
    variance[kDragSlopeFront] = variance[kDragSlopeRear] = square(kDragSlopePriorSd_m);
    variance[kSlipDrive] = variance[kSlipBrake] = square(kSlipPriorSd);
    variance[kAccelOffset] = square(kAccelOffsetSd_mps2);
    variance[kAccelGain] = square(kAccelGainSd);
    variance[kDriveGain] = square(kDriveGainSd);
    variance[kWindUnseen] = square(kWindPriorSd_mps);
    filter_.set_diagonal(variance);
    filter_.x[kDragArea] = kDragAreaPrior_m2;
    filter_.x[kDragFlap] = kDragFlapPrior_m2;
    filter_.x[kDragSlopeFront] = filter_.x[kDragSlopeRear] = kDragSlopePrior_m;
    filter_.x[kSlipDrive] = filter_.x[kSlipBrake] = kSlipPrior;
}

void LongitudinalFilter::predict(double dt_s, double accel_x_mps2, double noise_density) {
    filter_.x[kSpeed] += dt_s * true_accel_mps2(accel_x_mps2);
    for (std::size_t j = kAccelOffset; j < kLongitudinalCount; ++j) {
        auto& column = filter_.column(j);
        column[kSpeed] -= dt_s * column[kAccelOffset];
        if (j >= kAccelGain) column[kSpeed] -= dt_s * accel_x_mps2 * column[kAccelGain];
    }
    filter_.diagonal(kSpeed) +=
        noise_density * dt_s;  // speed is the first state: its own noise is its own diagonal
}

void LongitudinalFilter::drift(double elapsed_s, double common_share, bool wind_unseen, double turn_radps) {
    if (wind_unseen) {
        const double keep = std::exp(-elapsed_s * turn_radps / kTurnForgets_rad);
        filter_.x[kWindUnseen] *= keep;
        filter_.scale_state(kWindUnseen, keep);
        filter_.add_noise(
            kWindUnseen, square(kWindPriorSd_mps) * (1.0 - keep * keep) + square(kWindDrift_mps) * elapsed_s);
    } else if (filter_.diagonal(kWindUnseen) > 0.0) {
        filter_.x[kWindUnseen] = 0.0;
        filter_.reset_state(kWindUnseen, 0.0);
    }
    filter_.add_noise(kDragArea,
                      (square(kDragDrift_m2) + square(common_share * filter_.x[kDragArea])) * elapsed_s);
    filter_.add_noise(kAccelOffset, square(kAccelOffsetDrift_mps2) * elapsed_s);
}

void LongitudinalFilter::restart(double speed_mps) {
    filter_.reset_state(kSpeed, square(1.0));
    filter_.x[kSpeed] = speed_mps;
}

LongitudinalFilter::Filter::Vector LongitudinalFilter::J_speed_state(const Filter::Vector& x,
                                                                     double force_in_weights) {
    Filter::Vector h{};
    const LongitudinalState slip = force_in_weights >= 0.0 ? kSlipDrive : kSlipBrake;
    h[kSpeed] = 1.0 + x[slip] * force_in_weights;
    h[slip] = x[kSpeed] * force_in_weights;
    return h;
}

LongitudinalFilter::Filter::Vector LongitudinalFilter::J_drag_state(const Filter::Vector& x,
                                                                    const DragInput& in) {
    Filter::Vector h{};
    const double share = air_share(x[kWindUnseen], in.speed_mps);
    const double q = in.dynamic_pressure_pa * square(share);
    h[kDragArea] = q;
    h[kDragFlap] = -q * in.missing;
    h[kDragSlopeFront] = q * in.dh_front_m;
    h[kDragSlopeRear] = q * in.dh_rear_m;
    h[kWindUnseen] = 2.0 * air_force_n(x, in) / (share * std::max(in.speed_mps, kWindLeastSpeed_mps));
    h[kAccelOffset] = -in.mass_kg;
    h[kAccelGain] = -in.mass_kg * in.accel_x_mps2;
    h[kDriveGain] = in.drive_force_n;
    return h;
}

Innovation<double> LongitudinalFilter::update_speed(double measured_mps, double tyre_force_n, double weight_n,
                                                    double noise_sd_mps, double gate) {
    const double force_in_weights = tyre_force_n / weight_n;
    const auto h = J_speed_state(filter_.x, force_in_weights);
    const double predicted = filter_.x[kSpeed] * h[kSpeed];  // the slip's own entry is the derivative of this
    Innovation<double> out{measured_mps - predicted, 0.0};
    out.variance = filter_.expect(h, square(noise_sd_mps));
    if (square(out.value) <= square(gate) * out.variance) filter_.apply(out.value);
    return out;
}

Innovation<double> LongitudinalFilter::update_true_speed(double innovation_mps, double noise_sd_mps,
                                                         double gate) {
    Filter::Vector h{};
    h[kSpeed] = 1.0;
    Innovation<double> out{innovation_mps, filter_.expect(h, square(noise_sd_mps))};
    if (square(out.value) <= square(gate) * out.variance) filter_.apply(out.value);
    return out;
}

double LongitudinalFilter::air_force_n(const Filter::Vector& x, const DragInput& in) {
    return in.dynamic_pressure_pa * square(air_share(x[kWindUnseen], in.speed_mps)) *
           (x[kDragArea] - in.missing * x[kDragFlap] + in.dh_front_m * x[kDragSlopeFront] +
            in.dh_rear_m * x[kDragSlopeRear]);
}

Innovation<double> LongitudinalFilter::update_drag(const DragInput& in, double gate) {
    const double rolling = rolling_resistance_.value * (in.mass_kg * kGravity + in.downforce_n);
    // The scale error multiplies the acceleration that the forces ask for: the measured one carries this
    // measurement's own noise, which would be taken for scale.
    DragInput expected = in;
    expected.accel_x_mps2 = (in.drive_force_n - rolling - air_force_n(in)) / in.mass_kg;
    const auto h = J_drag_state(filter_.x, expected);
    const double left = in.drive_force_n - rolling - in.mass_kg * in.accel_x_mps2;
    double predicted = air_force_n(in);
    for (const LongitudinalState i : {kAccelOffset, kAccelGain, kDriveGain}) predicted += h[i] * filter_.x[i];
    Innovation<double> out{left - predicted, 0.0};
    out.variance = filter_.expect(h, square(in.noise_sd_n));
    if (square(out.value) <= square(gate) * out.variance) filter_.apply(out.value);
    return out;
}

Quantity LongitudinalFilter::drag_area(double dh_front_m, double dh_rear_m, double missing, double missing_sd,
                                       double dynamic_pressure_pa, double vertical_force_n) const {
    DragInput unit;
    unit.dynamic_pressure_pa = 1.0;
    unit.speed_mps = filter_.x[kSpeed];
    unit.dh_front_m = dh_front_m;
    unit.dh_rear_m = dh_rear_m;
    unit.missing = missing;
    const auto h = J_drag_state(filter_.x, unit);
    const double rolling_sd = rolling_resistance_.sd * vertical_force_n / std::max(dynamic_pressure_pa, 1.0);
    const double flap_sd = filter_.x[kDragFlap] * missing_sd;
    return {air_force_n(unit), std::sqrt(filter_.variance_of(h) + square(rolling_sd) + square(flap_sd))};
}

}  // namespace holdfast::core
