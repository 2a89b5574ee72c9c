// SPDX-License-Identifier: MIT
#include "estimator/core/zones.hpp"

#include <cmath>

namespace holdfast::core {
namespace {

constexpr double kReach_m = 90.0;  // brake points of one zone scatter less; two zones lie further apart

}  // namespace

std::int32_t Zones::at(double lap_distance_m) {
    if (!std::isfinite(lap_distance_m)) return kUnknown;
    std::size_t nearest = count_;
    double least = kReach_m;
    for (std::size_t i = 0; i < count_; ++i) {
        const double off = std::abs(distance_m_[i] - lap_distance_m);
        if (off < least) {
            least = off;
            nearest = i;
        }
    }
    if (nearest == count_) {
        if (count_ == kCapacity) return kUnknown;
        distance_m_[count_] = lap_distance_m;
        seen_[count_] = 1;
        return static_cast<std::int32_t>(++count_);
    }
    ++seen_[nearest];
    distance_m_[nearest] += (lap_distance_m - distance_m_[nearest]) / static_cast<double>(seen_[nearest]);
    return static_cast<std::int32_t>(nearest + 1);
}

}  // namespace holdfast::core
