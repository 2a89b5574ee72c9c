// SPDX-License-Identifier: MIT
#include "estimator/core/brake_onset.hpp"

#include <algorithm>

namespace holdfast::core {
namespace {

constexpr double kOnset_pa =
    1.5e5;  // above rest: on; several times a sensor's noise, a fiftieth of hard braking
constexpr double kRelease_pa = 0.7e5;
constexpr double kOnset_mps2 = 5.0;   // deceleration beyond drag that only brakes give
constexpr double kBegins_mps2 = 2.0;  // beyond what a lifted throttle and the noise give
constexpr double kMostRise_s = 0.05;
constexpr double kRelease_mps2 = 2.0;
constexpr double kIdle_mps2 = 1.0;  // decelerating by less, no brakes are on that matter
constexpr double kSmoothing_s = 0.010;

}  // namespace

std::optional<double> BrakeOnset::pressure(double time_s, double pressure_pa) {
    if (!have_pressure_) {
        have_pressure_ = true;
        rest_pa_ = std::min(pressure_pa, kOnset_pa);
        before_pa_ = pressure_pa;
        before_time_s_ = time_s;
    }
    std::optional<double> onset;
    const double above = pressure_pa - rest_pa_;
    if (!braking_ && above > kOnset_pa) {
        braking_ = true;
        // Back along the straight line through the last two samples to where it left the resting value.
        const double rise = pressure_pa - before_pa_;
        const double back = rise > 0.0 ? std::clamp(above / rise, 0.0, 1.0) : 0.0;
        onset = time_s - back * (time_s - before_time_s_);
    } else if (braking_ && above < kRelease_pa) {
        braking_ = false;
    }
    if (!braking_ && above < kRelease_pa) rest_pa_ += 0.01 * above;
    before_pa_ = pressure_pa;
    before_time_s_ = time_s;
    return onset;
}

std::optional<double> BrakeOnset::acceleration(double time_s, double accel_mps2,
                                               double accel_without_brakes_mps2) {
    const double beyond = accel_mps2 - accel_without_brakes_mps2;
    const double share = std::min((time_s - smooth_time_s_) / kSmoothing_s, 1.0);
    const double before_mps2 = smooth_mps2_;
    smooth_mps2_ += share * (beyond - smooth_mps2_);
    // When it left the level of a lifted throttle, between the last two samples.
    if (before_mps2 > -kBegins_mps2 && smooth_mps2_ <= -kBegins_mps2) {
        const double back = (-kBegins_mps2 - smooth_mps2_) / (before_mps2 - smooth_mps2_);
        began_s_ = time_s - back * (time_s - smooth_time_s_);
    }
    if (have_pressure_) {
        const bool disagrees = !braking_ && smooth_mps2_ < -2.0 * kOnset_mps2;
        const double since_s = std::min(time_s - smooth_time_s_, kSmoothing_s);
        disagrees_s_ = disagrees ? disagrees_s_ + since_s : 0.0;
        idle_s_ = braking_ && smooth_mps2_ > -kIdle_mps2 ? idle_s_ + since_s : 0.0;
        smooth_time_s_ = time_s;
        return std::nullopt;
    }
    disagrees_s_ = 0.0;
    smooth_time_s_ = time_s;
    if (!braking_ && smooth_mps2_ < -kOnset_mps2) {
        braking_ = true;
        // Back along the straight line through both levels to where the deceleration began, less what the
        // smoothing holds it up.
        const double rise_s = std::min(time_s - began_s_, kMostRise_s);
        return time_s - rise_s * kOnset_mps2 / (kOnset_mps2 - kBegins_mps2) - kSmoothing_s;
    }
    if (braking_ && smooth_mps2_ > -kRelease_mps2) braking_ = false;
    return std::nullopt;
}

}  // namespace holdfast::core
