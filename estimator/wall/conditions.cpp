// SPDX-License-Identifier: MIT
#include "estimator/wall/conditions.hpp"

#include <cmath>

namespace holdfast::wall {
namespace {

constexpr double kAtSpeed_mps = 30.0;  // below, a pitot's zero is much of what it reads

void take_channel(const Frame& frame, Channel channel, Range& range) {
    if (!frame.has(channel)) return;
    const double value = frame.get(channel);
    if (value >= info(channel).least && value <= info(channel).most) range.take(value);
}

}  // namespace

void Conditions::take(const Frame& frame) {
    take_channel(frame, Channel::air_temperature, air_temperature_k);
    take_channel(frame, Channel::air_pressure, air_pressure_pa);
    take_channel(frame, Channel::relative_humidity, relative_humidity);
    take_channel(frame, Channel::lap, lap);
}

void Conditions::take(const core::Estimate& estimate) {
    if ((estimate.flags & core::kStandardAir) == 0) air_density_kgpm3.take(estimate.air_density_kgpm3);
    const bool measured =
        (estimate.flags & (core::kGroundReference | core::kNotConverged | core::kStale)) == 0;
    if (!measured || estimate.speed_mps < kAtSpeed_mps) return;
    const double headwind = estimate.air_speed_mps - estimate.speed_mps;
    headwind_count_ += 1.0;
    headwind_sum_ += headwind;
    headwind_squares_ += headwind * headwind;
}

std::optional<core::Quantity> Conditions::headwind_mps() const {
    if (headwind_count_ < 1.0) return std::nullopt;
    const double mean = headwind_sum_ / headwind_count_;
    const double variance = std::max(0.0, headwind_squares_ / headwind_count_ - mean * mean);
    return core::Quantity{mean, std::sqrt(variance)};
}

}  // namespace holdfast::wall
