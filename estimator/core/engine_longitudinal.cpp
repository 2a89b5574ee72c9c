// SPDX-License-Identifier: MIT
// The engine's step along the track: speed, acceleration, pitot, drag.
#include <algorithm>
#include <cmath>

#include "estimator/core/engine.hpp"
#include "estimator/core/small_math.hpp"

namespace holdfast::core {
namespace {

// Spectral density of the acceleration where no accelerometer tells it: with the speed at hand, and without.
constexpr double kDensityBySpeed_m2ps3 = 4.0, kDensityBlind_m2ps3 = 400.0;
constexpr double kDerivative_s = 0.05;      // the speed's derivative is smoothed over so much
constexpr double kDerivativeSd_mps2 = 3.0;  // its error keeps its sign over several samples
constexpr double kDragSettle_s = 0.4;       // drive force: mean residual over so long
constexpr double kDragOff = 0.13;           // beyond so many weights it is wrong
constexpr double kDragWind = 0.22;          // and, where the wind is not measured, beyond so much of the drag
constexpr double kKeepEvery_s = 10.0;
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
        if (!have_accel_x_) {  // the derivative stands in for the accelerometer, with its offset
            const double since = time_s - speed_time_s_;
            if (speed_time_s_ > 0.0 && since > 0.0 && since < 0.2) {
                const double accel =
                    (measured - speed_before_mps_) / since + longitudinal_.filter().x[kAccelOffset];
                accel_x_mps2_ += std::min(since / kDerivative_s, 1.0) * (accel - accel_x_mps2_);
            }
            speed_before_mps_ = measured;
            speed_time_s_ = time_s;
        }
    }
    if (has(admitted, Channel::lap_distance)) fuse_distance(time_s, frame.get(Channel::lap_distance));
    if (has(admitted, Channel::pitot_pressure)) fuse_pitot(time_s, frame.get(Channel::pitot_pressure));
    if (heard(frame, admitted, Channel::drive_force)) {
        drive_force_before_n_ = drive_force_n_;
        drive_force_n_ = frame.get(Channel::drive_force);
        const bool steady = std::abs(drive_force_n_ - drive_force_before_n_) < 0.03 * mass_kg() * kGravity;
        const bool no_brakes = !brakes_.braking() && accel_x_mps2_ > -drag_n() / mass_kg() - kNoBrakes_mps2;
        if (steady && no_brakes && (accel_x_count_ > 0.0 || !have_accel_x_) &&
            longitudinal_.speed_mps() > kDragFrom_mps && std::abs(accel_y_mps2_) < kStraight_mps2 &&
            !tracker_.bank().running()) {
            LongitudinalFilter::DragInput in = drag_input();
            in.drive_force_n = 0.5 * (drive_force_before_n_ + drive_force_n_);
            in.accel_x_mps2 = have_accel_x_ ? accel_x_sum_ / accel_x_count_ : accel_x_mps2_;
            const double accel_sd =
                have_accel_x_ ? std::max(accel_noise, 0.05) / std::sqrt(accel_x_count_) : kDerivativeSd_mps2;
            in.noise_sd_n = std::hypot(in.mass_kg * accel_sd, std::max(0.10 * in.mass_kg * kGravity, 1.0));
            const double gate = usable(Channel::drive_force) ? kDragGate : 0.0;  // named: only looked at
            (void)longitudinal_.update_drag(in, gate);
            const double interval = std::max(intake_.health()[index(Channel::drive_force)].interval_s, 1e-3);
            // A force or an acceleration that drifts is followed by the drag: held against the filter of ten
            // to twenty seconds ago it stands out. The wind may have turned since.
            const auto off = longitudinal_older_.update_drag(in, 0.0);
            drag_off_n_ += std::min(interval / kDragSettle_s, 1.0) * (off.value - drag_off_n_);
            const double state_sd_n = std::sqrt(std::max(off.variance - square(in.noise_sd_n), 0.0));
            const double limit_n = kDragOff * in.mass_kg * kGravity + 2.0 * state_sd_n +
                                   (have_pitot_ ? 0.0 : kDragWind * drag_n());
            drag_refusal_.add(std::abs(drag_off_n_) > limit_n, interval);
            keep_longitudinal(time_s, std::abs(drag_off_n_) < 0.5 * limit_n);
            if (drag_refusal_.wrong() && time_s > forces_unsure_s_ + kForcesSettle_s &&
                usable(Channel::drive_force)) {
                distrust(Channel::drive_force, Fault::jumped);
                back_to_older_longitudinal();
            }
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
    in.dh_front_m = front_heights_.dh_m();
    in.dh_rear_m = rear_heights_.dh_m();
    in.missing = missing_open_;
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

// Two copies of the filter along the track, at least one of them from before a fault that is being followed.
void Engine::keep_longitudinal(double time_s, bool calm) {
    if (time_s < next_keep_s_ || !calm || !usable(Channel::drive_force)) return;
    next_keep_s_ = time_s + kKeepEvery_s;
    longitudinal_older_ = longitudinal_newer_;
    longitudinal_newer_ = longitudinal_;
}

// What a wrong sensor has taught is forgotten; the speed goes on.
void Engine::back_to_older_longitudinal() {
    const double speed_mps = longitudinal_.speed_mps();
    longitudinal_ = longitudinal_newer_ = longitudinal_older_;
    longitudinal_.restart(speed_mps);
}

}  // namespace holdfast::core
