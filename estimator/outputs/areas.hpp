// SPDX-License-Identifier: MIT
// The aerodynamic areas of an outing, flap closed and flap open, out of its estimates.
#pragma once

#include <cstdint>
#include <optional>

#include "estimator/core/results.hpp"

namespace holdfast::outputs {

// Mean of values weighted by their inverse variance. Neighbouring estimates share their errors, so the
// uncertainty does not fall with their number: it is the weighted root mean square of the estimates' own
// uncertainties, or the values' spread where that is larger.
class WeightedMean {
  public:
    // Values without a positive, finite uncertainty are left out.
    void add(const core::Quantity& value);
    [[nodiscard]] std::optional<core::Quantity> mean() const;  // nothing until a value has come
    [[nodiscard]] std::uint64_t count() const { return count_; }

  private:
    std::uint64_t count_ = 0;
    double weight_ = 0.0;
    double mean_ = 0.0;
    double squares_ = 0.0;  // sum of weight * (value - mean)^2, kept up after West (1979)
};

struct AreaMeans {
    WeightedMean cla_front_m2;
    WeightedMean cla_rear_m2;
    WeightedMean cda_m2;

    void add(const core::Estimate& estimate);
};

// Sorts the estimates that speak of a steady flow: above 50 m/s, converged, not stale, and the flap's flow
// either wholly there (closed) or wholly given up (open).
class Areas {
  public:
    void add(const core::Estimate& estimate);
    [[nodiscard]] const AreaMeans& closed() const { return closed_; }
    [[nodiscard]] const AreaMeans& open() const { return open_; }

  private:
    AreaMeans closed_;
    AreaMeans open_;
};

}  // namespace holdfast::outputs
