// SPDX-License-Identifier: MIT
// Under what an outing was driven, for the report: ranges of the weather as measured, of the air density as
// used, of the laps; the wind along the car where the air speed is measured.
#pragma once

#include <algorithm>
#include <limits>
#include <optional>

#include "estimator/core/results.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::wall {

struct Range {
    double least = std::numeric_limits<double>::infinity();
    double most = -std::numeric_limits<double>::infinity();

    void take(double value) {
        least = std::min(least, value);
        most = std::max(most, value);
    }
    [[nodiscard]] bool known() const { return least <= most; }
};

class Conditions {
  public:
    void take(const Frame& frame);
    void take(const core::Estimate& estimate);

    Range air_temperature_k, air_pressure_pa, relative_humidity, lap;
    Range air_density_kgpm3;  // nothing where it was the standard atmosphere's

    // Mean and standard deviation of air speed less speed over ground, m/s, at speed; nothing without a
    // pitot.
    [[nodiscard]] std::optional<core::Quantity> headwind_mps() const;

  private:
    double headwind_count_ = 0.0, headwind_sum_ = 0.0, headwind_squares_ = 0.0;
};

}  // namespace holdfast::wall
