// SPDX-License-Identifier: MIT
#include "estimator/core/axle_loads.hpp"

#include <algorithm>

namespace holdfast::core {
namespace {

constexpr double kSilentIntervals = 4.0;  // a corner silent for longer is taken from the other one
constexpr double kSilentLeast_s = 0.010;
constexpr double kTransferSd_n = 250.0;    // how well one corner tells the other's load
constexpr double kTransferMemory_s = 0.2;  // over which that error keeps its sign
constexpr double kForget = 0.9999;
constexpr double kNoiseUnknown_n = 40.0;
// What the forces on the sprung mass have beside the measured loads (links, exhaust, steering): white, common
// practice.
constexpr double kModelDensity_n2s = 200.0;

}  // namespace

void AxleLoads::learn_transfer(double difference_n, double accel_y_mps2) {
    const double a = accel_y_mps2;
    const double pg = p_gg_ * a + p_go_;
    const double po = p_go_ * a + p_oo_;
    const double s = 1e4 + pg * a + po;  // 100 N of scatter
    const double e = difference_n - gain_kg_ * a - offset_n_;
    gain_kg_ += pg / s * e;
    offset_n_ += po / s * e;
    p_gg_ = std::min((p_gg_ - pg * pg / s) / kForget, 1e6);
    p_go_ = (p_go_ - pg * po / s) / kForget;
    p_oo_ = std::min((p_oo_ - po * po / s) / kForget, 1e6);
}

AxleLoads::Load AxleLoads::take(const Frame& frame, std::uint64_t admitted, const Intake& intake,
                                double accel_y_mps2) {
    const bool new_left = ((admitted >> index(left_)) & 1U) != 0;
    const bool new_right = ((admitted >> index(right_)) & 1U) != 0;
    if (new_left) left_n_ = frame.get(left_);
    if (new_right) right_n_ = frame.get(right_);
    if (new_left && new_right) learn_transfer(left_n_ - right_n_, accel_y_mps2);

    const auto usable = [&](Channel c) {
        const ChannelHealth& h = intake.health()[index(c)];
        return h.trust == Trust::good &&
               intake.age_s(c, frame.time_ns) <= std::max(kSilentIntervals * h.interval_s, kSilentLeast_s);
    };
    const auto density = [&](Channel c) {
        const double sd = intake.noise_sd(c) > 0.0 ? intake.noise_sd(c) : kNoiseUnknown_n;
        return sd * sd * std::max(intake.health()[index(c)].interval_s, 1e-4);
    };
    const bool left = usable(left_);
    const bool right = usable(right_);
    const double difference = offset_n_ + gain_kg_ * accel_y_mps2;
    constexpr double kSubstitute = 2.0 * kTransferSd_n * kTransferSd_n * kTransferMemory_s;
    Load out;
    out.known = left || right;
    if (left && right) {
        out.sum_n = left_n_ + right_n_;
        out.noise_density_n2s = density(left_) + density(right_) + kModelDensity_n2s;
    } else if (left) {
        out.sum_n = 2.0 * left_n_ - difference;
        out.noise_density_n2s = 4.0 * density(left_) + kSubstitute;
    } else if (right) {
        out.sum_n = 2.0 * right_n_ + difference;
        out.noise_density_n2s = 4.0 * density(right_) + kSubstitute;
    } else {
        out.sum_n = left_n_ + right_n_;
    }
    return out;
}

}  // namespace holdfast::core
