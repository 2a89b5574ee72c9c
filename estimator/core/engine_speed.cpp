// SPDX-License-Identifier: MIT
// The engine's speed: the sensor, the lap distance that vouches for it or stands in for it, and the
// accelerometer that both are held against.
#include <algorithm>
#include <cmath>

#include "estimator/core/engine.hpp"
#include "estimator/core/small_math.hpp"

namespace holdfast::core {
namespace {

constexpr double kSlipLag_s =
    0.06;  // common practice, no source: tyre relaxation length over speed, wheel inertia
constexpr double kSlipUnsure = 0.010;  // relative speed error for a force of one weight not yet followed
constexpr double kLost_mps = 15.0;
constexpr double kSpeedGate = 8.0;
constexpr double kSpeedReturnGate = 3.0;  // for a speed that was named
constexpr double kSpeedAlone_s = 1.0;     // then a refused speed is believed where there is no accelerometer
constexpr double kInnovationMemory_s = 0.1;
constexpr double kReconsider_s = 1.0;
constexpr double kAccelAgrees_mps2 = 1.0;
constexpr double kDistanceGate = 6.0;
constexpr double kAccelOffsetUnsure_mps2 = 0.3;  // that a drifting speed may have taught

}  // namespace

void Engine::fuse_speed(double measured_mps, double since_s) {
    // Slip follows the tyre force with the wheels' and the tyres' lag: while the force changes it is unsure.
    const double weight_n = mass_kg() * kGravity;
    speed_less_slip_mps_ = measured_mps / longitudinal_.slip_factor(slip_force_n_ / weight_n);
    slip_force_n_ += std::min(since_s / kSlipLag_s, 1.0) * (tyre_force_x_n() - slip_force_n_);
    const double unsure = kSlipUnsure * measured_mps * std::abs(tyre_force_x_n() - slip_force_n_) / weight_n;
    const double noise = std::hypot(std::max(intake_.noise_sd(Channel::speed), 0.02), 0.03, unsure);
    const bool named = !usable(Channel::speed);
    const double gate = named ? kSpeedReturnGate : kSpeedGate;
    // While the lap distance stands in, a speed that was named is only looked at.
    const bool stood_in = named && static_cast<double>(time_ns_) * 1e-9 < distance_used_s_ + kSpeedAlone_s;
    const auto innovation =
        longitudinal_.update_speed(measured_mps, slip_force_n_, weight_n, noise, stood_in ? 0.0 : gate);
    MeasurementStatus& status = intake_.health()[index(Channel::speed)].status;
    status.predicted = measured_mps - innovation.value;
    status.innovation = innovation.value;
    status.innovation_variance = innovation.variance;
    status.test_ratio = square(innovation.value / gate) / innovation.variance;
    const bool refused = status.test_ratio > 1.0;
    status.result = refused ? FusionResult::gated : FusionResult::used;
    speed_refusal_.add(refused, since_s);
    if (!refused) {
        if (!stood_in) last_speed_s_ = static_cast<double>(time_ns_) * 1e-9;
        if (speed_refusal_.right()) {
            trust_again(Channel::speed, Fault::jumped);
            trust_again(Channel::speed, Fault::drifting);
        }
    } else {
        speed_refused_lately_ = true;
        ++intake_.health()[index(Channel::speed)].gated;
        // A speed that jumps leaves the prediction at once; an accelerometer that is off leads it away bit by
        // bit.
        if (speed_refusal_.begins())
            refused_by_drift_ = std::abs(speed_innovation_before_) > 0.3 * std::abs(innovation.value);
        if (speed_refusal_.wrong() && refused_by_drift_ && have_accel_x_ && !named) {
            distrust(Channel::accel_x, Fault::jumped);
            back_to_older_longitudinal();
            forces_unsure_s_ = static_cast<double>(time_ns_) * 1e-9;
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
        if ((alone || lost) && !stood_in) longitudinal_.restart(measured_mps);
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

// The lap distance: beside a sound speed sensor it only watches; while there is none it is the speed.
void Engine::fuse_distance(double time_s, double distance_m) {
    const auto window =
        distance_speed_.add(time_s, distance_m, longitudinal_.speed_mps(), speed_less_slip_mps_);
    if (!window) return;
    const bool refused_lately = speed_refused_lately_;
    speed_refused_lately_ = false;
    const double innovation = window->by_distance_mps - window->filter_mps;
    if (usable(Channel::speed)) {
        if (refused_lately) return;
        speed_witness_.compare(*window);
        speed_witness_.learn_noise(innovation);
        if (!speed_witness_.sensor_drifts()) return;
        distrust(Channel::speed, Fault::drifting);
        longitudinal_.restart(window->by_distance_mps + 0.5 * window->span_s * accel_x_mps2_);
        last_speed_s_ = distance_used_s_ = time_s;
        longitudinal_.filter().add_noise(kAccelOffset, square(kAccelOffsetUnsure_mps2));
        speed_refusal_.clear();
        return;
    }
    if (!speed_witness_.distance_sound()) return;
    const auto seen =
        longitudinal_.update_true_speed(innovation, speed_witness_.noise_sd_mps(), kDistanceGate);
    if (square(seen.value) <= square(kDistanceGate) * seen.variance)
        last_speed_s_ = distance_used_s_ = time_s;
}

}  // namespace holdfast::core
