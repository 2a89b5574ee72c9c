// SPDX-License-Identifier: MIT
#include "estimator/core/axle_loads.hpp"

#include <algorithm>

namespace holdfast::core {
namespace {

constexpr double kSilentIntervals = 4.0;  // a corner silent for longer is taken from elsewhere
constexpr double kSilentLeast_s = 0.010;
constexpr double kErrorMemory_s = 0.2;  // over which a substitute's error keeps its sign
constexpr double kNoiseUnknown_n = 40.0;
// What the forces on the sprung mass have beside the measured loads (links, exhaust, steering) and what the
// model leaves out: white, found on simulated cars by the consistency of the innovations.
constexpr double kModelDensity_n2s = 200.0;

double coloured_density(double error) {
    return 2.0 * error * error * kErrorMemory_s;
}

}  // namespace

AxleLoads::Load AxleLoads::take(const Frame& frame, std::uint64_t admitted, const Intake& intake,
                                const AxleWatch& watch, const Surroundings& around) {
    if (((admitted >> index(left_)) & 1U) != 0) left_n_ = frame.get(left_);
    if (((admitted >> index(right_)) & 1U) != 0) right_n_ = frame.get(right_);
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
    const double difference = watch.side_difference_n(around.accel_y_mps2);
    Load out;
    out.known = left || right || around.dh_known;
    if (left && right) {
        out.sum_n = left_n_ + right_n_;
        out.noise_density_n2s = density(left_) + density(right_) + kModelDensity_n2s;
    } else if (left || right) {
        out.sum_n = left ? 2.0 * left_n_ - difference : 2.0 * right_n_ + difference;
        out.noise_density_n2s =
            4.0 * density(left ? left_ : right_) + kModelDensity_n2s + coloured_density(watch.side_error_n());
    } else {
        out.sum_n =
            around.dh_known ? watch.load_from_height_n(around.dh_m, around.speed_mps) : left_n_ + right_n_;
        out.noise_density_n2s = kModelDensity_n2s + coloured_density(watch.load_error_n());
    }
    return out;
}

}  // namespace holdfast::core
