// SPDX-License-Identifier: MIT
// The engine's air speed: the pitot taken in, watched and named.
#include <algorithm>
#include <cmath>

#include "estimator/core/engine.hpp"
#include "estimator/core/small_math.hpp"

namespace holdfast::core {
namespace {

constexpr double kSmoothing_s = 0.05;
constexpr double kFrom_mps = 15.0;  // below, its own offset is most of what it reads
// From the mean of the last 50 ms: gusts of 1.2 m/s that last 1.5 s change by 0.3 m/s in that time. Beyond,
// the sample is held back; after kJumped_s of such samples it is the sensor that jumped.
constexpr double kJump_mps = 2.0;
constexpr double kJumpNoises = 6.0;
constexpr double kJumped_s = 0.04;
constexpr std::uint64_t kSettledAfter = 100;  // samples; its noise is known then
constexpr double kLevelHolds_s = 2.0;         // without samples; the wind may turn with the car
constexpr double kLearned_s = 40.0;           // before, the areas are not known well enough to judge by
constexpr double kFast_mps = 40.0;            // it is watched from here on
constexpr double kSettle_s = 0.5;
// Dynamic pressure against the downforce: off by more than a gust of so much makes, and than the loads are
// off.
constexpr double kOff_mps = 3.5, kOff_n = 300.0;
constexpr double kBack = 0.5;  // of that limit: near enough to be believed again

}  // namespace

// Whether an admitted sample has left the mean of late at once; named when that lasts.
bool Engine::pitot_jumps(double time_s, double beyond_ground_pa, double interval_s) {
    const double since_s = time_s - pitot_level_s_;
    const double speed = std::max(longitudinal_.speed_mps(), kFrom_mps);
    const double limit_pa = air_density_kgpm3_ * speed * kJump_mps * (1.0 + since_s) +
                            kJumpNoises * intake_.noise_sd(Channel::pitot_pressure);
    const bool settled = intake_.health()[index(Channel::pitot_pressure)].samples > kSettledAfter;
    if (settled && since_s < kLevelHolds_s && std::abs(beyond_ground_pa - pitot_level_pa_) > limit_pa) {
        pitot_held_s_ += interval_s;
        if (pitot_held_s_ > kJumped_s) distrust(Channel::pitot_pressure, Fault::jumped);
        return true;
    }
    pitot_held_s_ = 0.0;
    const double share = since_s < kLevelHolds_s ? std::min(since_s / kSmoothing_s, 1.0) : 1.0;
    pitot_level_pa_ += share * (beyond_ground_pa - pitot_level_pa_);
    pitot_level_s_ = time_s;
    return false;
}

// Every frame with an admitted sample.
void Engine::fuse_pitot(double time_s, double measured_pa) {
    const double speed = longitudinal_.speed_mps();
    const double ground_pa = 0.5 * air_density_kgpm3_ * square(speed);
    const double interval = std::max(intake_.health()[index(Channel::pitot_pressure)].interval_s, 1e-3);
    if (pitot_jumps(time_s, measured_pa - ground_pa, interval)) return;
    if (speed <= kFrom_mps) {
        pitot_ratio_ = 1.0;
        return;
    }
    const double ratio = measured_pa / ground_pa;
    if (speed > PitotCalibration::kFrom_mps) {
        const double turn = have_heading_ ? 0.0 : std::abs(accel_y_mps2_) / speed * interval;
        pitot_calibration_.learn(ratio, speed, course_rad_, turn, interval);
    }
    const double share = have_pitot_ ? std::min(interval / kSmoothing_s, 1.0) : 1.0;
    if (!have_pitot_) chassis_.wind_is_measured();
    pitot_ratio_ =
        std::clamp(pitot_ratio_ + share * (ratio / pitot_calibration_.scale() - pitot_ratio_), 0.5, 2.0);
    have_pitot_ = true;
}

// The pitot against the downforce that the loads show: both go with the square of the same air speed.
void Engine::watch_pitot(double elapsed_s) {
    if (have_pitot_ && !usable(Channel::pitot_pressure)) {
        have_pitot_ = false;
        pitot_ratio_ = 1.0;
        chassis_.wind_is_unknown();
        forces_unsure_s_ = static_cast<double>(time_ns_) * 1e-9;
    }
    const ChannelHealth& h = intake_.health()[index(Channel::pitot_pressure)];
    if (have_pitot_) {
        pitot_drift_.add(pitot_calibration_.broken(), elapsed_s);
        if (pitot_drift_.wrong()) distrust(Channel::pitot_pressure, Fault::jumped);
    }
    const bool steady = longitudinal_.speed_mps() > kFast_mps && !brakes_.braking() &&
                        !tracker_.bank().running() && std::abs(accel_y_mps2_) < 8.0 &&
                        usable(Channel::flap_position) && (missing_open_ < 0.01 || missing_open_ > 0.99);
    const bool learned = static_cast<double>(time_ns_) * 1e-9 > start_s_ + kLearned_s;
    if (h.samples == 0 || !steady || !converged() || !learned) return;
    const auto& x = chassis_.filter().x;
    const ChassisConstants& c = chassis_.constants();
    const double measured_n = load_front_n_ + load_rear_n_ - c.weight_front_n - c.weight_rear_n -
                              x[kLoadOffsetFront] - x[kLoadOffsetRear] +
                              kGravity * (car_.mass_kg.value - mass_kg());
    const double area = chassis_.front_area_m2(front_heights_.dh_m()) +
                        chassis_.rear_area_m2(rear_heights_.dh_m()) -
                        missing_open_ * (x[kFlapAreaFront] + x[kFlapAreaRear]);
    if (measured_n < 1000.0) return;
    const double off = pitot_newest_pa_ / pitot_calibration_.scale() * area / measured_n - 1.0;
    pitot_off_ += std::min(elapsed_s / kSettle_s, 1.0) * (off - pitot_off_);
    const double limit = 2.0 * kOff_mps / longitudinal_.speed_mps() + kOff_n / measured_n;
    pitot_refusal_.add(std::abs(pitot_off_) > limit || pitot_calibration_.broken(), elapsed_s);
    pitot_return_.add(std::abs(pitot_off_) > kBack * limit, elapsed_s);
    if (pitot_refusal_.wrong()) distrust(Channel::pitot_pressure, Fault::jumped);
    if (pitot_refusal_.right() && pitot_return_.right()) trust_again(Channel::pitot_pressure, Fault::jumped);
}

}  // namespace holdfast::core
