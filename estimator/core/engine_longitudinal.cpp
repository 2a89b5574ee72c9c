// SPDX-License-Identifier: MIT
// The engine's step along the track: speed, acceleration, pitot, drag.
#include <algorithm>
#include <cmath>

#include "estimator/core/engine.hpp"
#include "estimator/core/small_math.hpp"

namespace holdfast::core {
namespace {

constexpr double kPitotSmoothing_s = 0.05;
constexpr double kSlipLag_s =
    0.06;  // common practice, no source: tyre relaxation length over speed, wheel inertia
constexpr double kSlipUnsure = 0.010;  // relative speed error for a force of one weight not yet followed
constexpr double kLost_mps = 15.0;
// Spectral density of the acceleration where no accelerometer tells it: with the speed at hand, and without.
constexpr double kDensityBySpeed_m2ps3 = 4.0, kDensityBlind_m2ps3 = 400.0;
constexpr double kSpeedGate = 8.0;
constexpr double kSpeedReturnGate = 3.0;  // for a speed that was named
constexpr double kSpeedAlone_s = 1.0;     // then a refused speed is believed where there is no accelerometer
constexpr double kInnovationMemory_s = 0.1;
constexpr double kReconsider_s = 1.0;
constexpr double kAccelAgrees_mps2 = 1.0;
constexpr double kDragSettle_s = 0.4;   // drive force: mean residual over so long
constexpr double kDragOff = 0.13;       // beyond so many weights it is wrong
constexpr double kNoBrakes_mps2 = 2.5;  // decelerating by no more than this beyond drag: the brakes are off
constexpr double kDragGate = 4.0;
constexpr double kDragFrom_mps = 30.0;  // below, drag drowns in the other forces
constexpr double kStraight_mps2 = 3.0;  // lateral acceleration beyond which tyres drag too much

}  // namespace

void Engine::step_longitudinal(const Frame& frame, std::uint64_t admitted, double dt_s) {
    const double time_s = frame.time_s();
    if (have_accel_x_ && !usable(Channel::accel_x)) {
        have_accel_x_ = false;
        speed_time_s_ = 0.0;
    }
    reconsider_accel_x(frame);
    if (has(admitted, Channel::accel_x)) {
        have_accel_x_ = true;
        accel_x_mps2_ = frame.get(Channel::accel_x);
        accel_x_sum_ += accel_x_mps2_;
        accel_x_count_ += 1.0;
    }
    const double accel_noise = intake_.noise_sd(Channel::accel_x);
    const double density = have_accel_x_
                               ? square(std::max(accel_noise, 0.05)) *
                                     std::max(intake_.health()[index(Channel::accel_x)].interval_s, 1e-3)
                           : usable(Channel::speed) ? kDensityBySpeed_m2ps3
                                                    : kDensityBlind_m2ps3;
    longitudinal_.predict(dt_s, accel_x_mps2_, density + 1e-4);
    if (heard(frame, admitted, Channel::speed)) {
        const double measured = frame.get(Channel::speed);
        const double since_s = std::max(intake_.health()[index(Channel::speed)].interval_s, 1e-3);
        fuse_speed(measured, since_s);
        if (!have_accel_x_) {  // the derivative stands in for the accelerometer
            const double since = time_s - speed_time_s_;
            if (speed_time_s_ > 0.0 && since > 0.0 && since < 0.2) {
                accel_x_mps2_ +=
                    std::min(since / 0.05, 1.0) * ((measured - speed_before_mps_) / since - accel_x_mps2_);
            }
            speed_before_mps_ = measured;
            speed_time_s_ = time_s;
        }
    }
    if (have_pitot_ && !usable(Channel::pitot_pressure)) {
        have_pitot_ = false;
        pitot_ratio_ = 1.0;
        chassis_.wind_is_unknown();
    }
    if (has(admitted, Channel::pitot_pressure)) {
        const double ground = 0.5 * air_density_kgpm3_ * square(longitudinal_.speed_mps());
        const double speed = longitudinal_.speed_mps();
        if (speed > 15.0) {
            const double ratio = frame.get(Channel::pitot_pressure) / ground;
            const double interval =
                std::max(intake_.health()[index(Channel::pitot_pressure)].interval_s, 1e-3);
            if (speed > PitotCalibration::kFrom_mps) {
                const double turn = have_heading_ ? 0.0 : std::abs(accel_y_mps2_) / speed * interval;
                pitot_calibration_.learn(ratio, speed, course_rad_, turn, interval);
            }
            const double share = have_pitot_ ? std::min(interval / kPitotSmoothing_s, 1.0) : 1.0;
            if (!have_pitot_) chassis_.wind_is_measured();
            pitot_ratio_ = std::clamp(
                pitot_ratio_ + share * (ratio / pitot_calibration_.scale() - pitot_ratio_), 0.5, 2.0);
            have_pitot_ = true;
        } else {
            pitot_ratio_ = 1.0;
        }
    }
    if (heard(frame, admitted, Channel::drive_force)) {
        drive_force_before_n_ = drive_force_n_;
        drive_force_n_ = frame.get(Channel::drive_force);
        const bool steady = std::abs(drive_force_n_ - drive_force_before_n_) < 0.03 * mass_kg() * kGravity;
        const bool no_brakes = !brakes_.braking() && accel_x_mps2_ > -drag_n() / mass_kg() - kNoBrakes_mps2;
        if (steady && no_brakes && accel_x_count_ > 0.0 && have_accel_x_ &&
            longitudinal_.speed_mps() > kDragFrom_mps && std::abs(accel_y_mps2_) < kStraight_mps2 &&
            !tracker_.bank().running()) {
            LongitudinalFilter::DragInput in = drag_input();
            in.drive_force_n = 0.5 * (drive_force_before_n_ + drive_force_n_);
            in.accel_x_mps2 = accel_x_sum_ / accel_x_count_;
            const double accel_sd = std::max(accel_noise, 0.05) / std::sqrt(accel_x_count_);
            in.noise_sd_n = std::hypot(in.mass_kg * accel_sd, std::max(0.10 * in.mass_kg * kGravity, 1.0));
            const double gate = usable(Channel::drive_force) ? kDragGate : 0.0;  // named: only looked at
            const auto innovation = longitudinal_.update_drag(in, gate);
            const double interval = std::max(intake_.health()[index(Channel::drive_force)].interval_s, 1e-3);
            drag_off_n_ += std::min(interval / kDragSettle_s, 1.0) * (innovation.value - drag_off_n_);
            drag_refusal_.add(std::abs(drag_off_n_) > kDragOff * in.mass_kg * kGravity, interval);
            if (drag_refusal_.wrong()) distrust(Channel::drive_force, Fault::jumped);
            if (drag_refusal_.right()) trust_again(Channel::drive_force, Fault::jumped);
        }
        accel_x_sum_ = accel_x_count_ = 0.0;
    }
}

// The air's part of the balance along x, and what the tyres carry, as it is now.
LongitudinalFilter::DragInput Engine::drag_input() const {
    LongitudinalFilter::DragInput in;
    in.speed_mps = longitudinal_.speed_mps();
    in.dynamic_pressure_pa = pressure_for_drag_pa();
    in.dh_front_m = front_heights_.smooth_dh_m();
    in.dh_rear_m = rear_heights_.smooth_dh_m();
    in.missing = missing_open_ * chassis_.flap_height_factor(in.dh_rear_m);
    in.mass_kg = mass_kg();
    const double sprung_kg = chassis_.constants().sprung_mass_kg - (car_.mass_kg.value - in.mass_kg);
    if (loads_known_) in.downforce_n = load_front_n_ + load_rear_n_ - sprung_kg * kGravity;
    return in;
}

// Without pitot and course the vertical filter's wind is the one that makes its areas constant over speed,
// and carries what is wrong with their slopes: the drag has a wind of its own. Gusts have no such mean.
double Engine::pressure_for_drag_pa() const {
    if (have_pitot_ || have_heading_) return dynamic_pressure_pa();
    return measured_pressure_pa() * (1.0 + chassis_.filter().x[kGust]);
}

double Engine::drag_n() const {
    return longitudinal_.air_force_n(drag_input());
}

void Engine::fuse_speed(double measured_mps, double since_s) {
    // Slip follows the tyre force with the wheels' and the tyres' lag: while the force changes it is unsure.
    const double weight_n = mass_kg() * kGravity;
    slip_force_n_ += std::min(since_s / kSlipLag_s, 1.0) * (tyre_force_x_n() - slip_force_n_);
    const double unsure = kSlipUnsure * measured_mps * std::abs(tyre_force_x_n() - slip_force_n_) / weight_n;
    const double noise = std::hypot(std::max(intake_.noise_sd(Channel::speed), 0.02), 0.03, unsure);
    const double gate = usable(Channel::speed) ? kSpeedGate : kSpeedReturnGate;
    const auto innovation = longitudinal_.update_speed(measured_mps, slip_force_n_, weight_n, noise, gate);
    MeasurementStatus& status = intake_.health()[index(Channel::speed)].status;
    status.predicted = measured_mps - innovation.value;
    status.innovation = innovation.value;
    status.innovation_variance = innovation.variance;
    status.test_ratio = square(innovation.value / gate) / innovation.variance;
    const bool refused = status.test_ratio > 1.0;
    status.result = refused ? FusionResult::gated : FusionResult::used;
    speed_refusal_.add(refused, since_s);
    if (!refused) {
        last_speed_s_ = static_cast<double>(time_ns_) * 1e-9;
        if (speed_refusal_.right()) trust_again(Channel::speed, Fault::jumped);
    } else {
        ++intake_.health()[index(Channel::speed)].gated;
        // A speed that jumps leaves the prediction at once; an accelerometer that is off leads it away bit by
        // bit.
        if (speed_refusal_.begins())
            refused_by_drift_ = std::abs(speed_innovation_before_) > 0.3 * std::abs(innovation.value);
        if (speed_refusal_.wrong() && refused_by_drift_ && have_accel_x_) {
            distrust(Channel::accel_x, Fault::jumped);
            longitudinal_.restart(measured_mps);
            speed_refusal_.clear();
        } else if (speed_refusal_.wrong()) {
            distrust(Channel::speed, Fault::jumped);
        }
        // Without an accelerometer there is nothing else to believe for long; and a speed this far off is a
        // filter that has lost the car, not a sensor's error.
        const bool alone = !have_accel_x_ && speed_refusal_.refused_s() > kSpeedAlone_s;
        const bool lost =
            std::abs(innovation.value) > kLost_mps && speed_refusal_.refused_s() > kSpeedAlone_s;
        if (alone || lost) longitudinal_.restart(measured_mps);
    }
    speed_innovation_before_ +=
        std::min(since_s / kInnovationMemory_s, 1.0) * (innovation.value - speed_innovation_before_);
}

// An accelerometer that was named is held against the speed's derivative until it agrees again.
void Engine::reconsider_accel_x(const Frame& frame) {
    const ChannelHealth& h = intake_.health()[index(Channel::accel_x)];
    if (h.trust != Trust::distrusted || h.fault != Fault::jumped || !frame.has(Channel::accel_x)) return;
    const double off = frame.get(Channel::accel_x) - accel_x_mps2_;
    if (!std::isfinite(off)) return;
    accel_x_off_mps2_ += std::min(h.interval_s / kReconsider_s, 1.0) * (off - accel_x_off_mps2_);
    accel_x_refusal_.add(std::abs(accel_x_off_mps2_) > kAccelAgrees_mps2, h.interval_s);
    if (accel_x_refusal_.right()) trust_again(Channel::accel_x, Fault::jumped);
}

}  // namespace holdfast::core
