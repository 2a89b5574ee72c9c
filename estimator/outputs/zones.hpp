// SPDX-License-Identifier: MIT
// The closings of an outing gathered by braking zone.
#pragma once

#include <cstdint>
#include <span>
#include <string>
#include <vector>

#include "estimator/core/results.hpp"

namespace holdfast::outputs {

struct Zone {
    std::int32_t number = 0;
    double distance_brake_m = 0.0;  // median lap distance of brake onset; NaN where the log has none
    std::uint32_t closures = 0;
    std::uint32_t short_of = 0;  // verdict short
    std::uint32_t slow = 0;
    double lead_now_s = 0.0;       // median from the closing command to brake onset
    double margin_median_s = 0.0;  // NaN where no margin is known
};

// Zones in the order of their numbers; closings without braking (zone 0) are in none.
[[nodiscard]] std::vector<Zone> zones(std::span<const core::Closure> closures);

// The text of zones.csv. The advice columns are empty: this version gives no advice on leads.
[[nodiscard]] std::string zones_csv(std::span<const Zone> zones);

}  // namespace holdfast::outputs
