// SPDX-License-Identifier: MIT
#include "estimator/outputs/areas.hpp"

#include <algorithm>
#include <cmath>

namespace holdfast::outputs {
namespace {

constexpr double kLeastSpeedMps = 50.0;
constexpr double kAttachedClosed = 0.98;  // above: the flap's downforce counts as wholly there
constexpr double kAttachedOpen = 0.02;    // below: as wholly given up

}  // namespace

void WeightedMean::add(const core::Quantity& value) {
    if (!std::isfinite(value.value) || !std::isfinite(value.sd) || value.sd <= 0.0) return;
    const double weight = 1.0 / (value.sd * value.sd);
    weight_ += weight;
    const double step = value.value - mean_;
    mean_ += step * weight / weight_;
    squares_ += weight * step * (value.value - mean_);
    ++count_;
}

std::optional<core::Quantity> WeightedMean::mean() const {
    if (count_ == 0) return std::nullopt;
    const double own_variance =
        static_cast<double>(count_) / weight_;  // sum(w sd^2) / sum(w), with w = 1/sd^2
    const double spread_variance = squares_ / weight_;
    return core::Quantity{mean_, std::sqrt(std::max(own_variance, spread_variance))};
}

void AreaMeans::add(const core::Estimate& estimate) {
    cla_front_m2.add(estimate.cla_front_m2);
    cla_rear_m2.add(estimate.cla_rear_m2);
    cda_m2.add(estimate.cda_m2);
}

void Areas::add(const core::Estimate& estimate) {
    constexpr std::uint32_t kUnfit = core::kNotConverged | core::kStale | core::kReattaching;
    if ((estimate.flags & kUnfit) != 0 || estimate.speed_mps <= kLeastSpeedMps) return;
    const bool flap_open = (estimate.flags & core::kFlapOpen) != 0;
    if (!flap_open && estimate.attached.value > kAttachedClosed) closed_.add(estimate);
    if (flap_open && estimate.attached.value < kAttachedOpen) open_.add(estimate);
}

}  // namespace holdfast::outputs
