// SPDX-License-Identifier: MIT
// How far an axle gives way under its load, learned from the outing: springs and tyres in series. MODEL.md
// [compliance]:
//   travel = C f + C1 max(0, f - f1) + C2 max(0, f - f2) + l links - g V^2 + offset
// with f the suspension load over the weight at rest, links the load that the links carry past the springs,
// g V^2 the tyres' growth. The steps C1 and C2 take what bump stops stiffen, so that C is the springs' and
// tyres' own. Travel is explained by load, not load by travel: the ride heights carry the road, which a fit
// the other way round takes for softness. Means over a fifth of a second leave the dampers out, which give
// back on the way up what they took on the way down. Hard braking is left out: for as long as it lasts the
// axles come up or go down, and the dampers' load keeps its sign.
#pragma once

#include <array>
#include <cstdint>

#include "estimator/core/car.hpp"
#include "estimator/core/mean.hpp"
#include "estimator/core/results.hpp"
#include "estimator/core/ud_filter.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::core {

class AxleCompliance {
  public:
    AxleCompliance(const Car& car, bool rear);

    // Means over a block. over_rest_n: both suspension loads less the weight at rest; travel_m: down from
    // rest, at the axle line; links_n: onto the axle's tyres, past its springs.
    struct Block {
        double over_rest_n = 0.0;
        double travel_m = 0.0;
        double links_n = 0.0;
        double speed_mps = 0.0;
    };
    void learn(const Block& block);

    // Springs and tyres in series, both corners, N/m; the uncertainty of the fit alone, without the sensors'
    // errors of scale.
    [[nodiscard]] Quantity rate_npm() const;
    [[nodiscard]] bool known() const;

  private:
    enum State : std::size_t { kCompliance, kFirstStep, kSecondStep, kLinks, kGrowth, kOffset, kCount };

    double weight_n_;
    UdFilter<double, kCount> filter_;
    std::uint32_t blocks_ = 0;
};

// Both axles' compliance from the frames: gathers the blocks.
class ChassisCompliance {
  public:
    explicit ChassisCompliance(const Car& car);

    // Every frame, with the speed and the tyres' force along x as the engine has them.
    void see(const Frame& frame, double speed_mps, double tyre_force_x_n, const HealthTable& health);
    [[nodiscard]] const AxleCompliance& axle(bool rear) const { return rear ? rear_ : front_; }

  private:
    void end_block(const HealthTable& health);
    [[nodiscard]] bool sound(Channel c, const HealthTable& health) const;
    [[nodiscard]] const Mean& mean(Channel c) const { return mean_[index(c)]; }

    AxleCompliance front_, rear_;
    std::array<RideHeightSensor, kMaxRideHeights> sensor_{};
    std::size_t sensor_count_;
    double wheelbase_m_;
    double weight_front_n_, weight_rear_n_;
    double link_per_force_, anti_dive_, anti_lift_, anti_squat_;
    std::array<Mean, kChannelCount> mean_{};
    Mean speed_, tyre_force_;
    double block_began_s_ = 0.0;
    bool in_block_ = false;
};

}  // namespace holdfast::core
