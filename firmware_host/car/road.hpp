// SPDX-License-Identifier: MIT
// The road under the wheels: an ISO 8608 profile (displacement spectrum falling with the square of the wave
// number), partly the same every lap, left and right partly alike, with kerbs. The rear axle meets what the
// front axle met.
#pragma once

#include <array>
#include <cstdint>
#include <vector>

#include "firmware_host/car/parameters.hpp"
#include "firmware_host/car/random.hpp"

namespace holdfast::sim {

class Road {
  public:
    static constexpr double kCellM = 0.05;

    // Heights can be asked for from `behind_m` behind to `ahead_m` ahead of the newest advance_to().
    Road(const RoadParameters& road, const std::vector<Kerb>& kerbs, double lap_m, double behind_m,
         double ahead_m, std::uint64_t seed);

    // Distance driven by the front axle since the start; never falls.
    void advance_to(double distance_m);

    [[nodiscard]] double left_m(double distance_m) const { return height(distance_m, 0); }
    [[nodiscard]] double right_m(double distance_m) const { return height(distance_m, 1); }

  private:
    using Sides = std::array<double, 2>;
    [[nodiscard]] double height(double distance_m, std::size_t side) const;
    [[nodiscard]] Sides draw(Random& random) const;
    void add_cell();

    RoadParameters road_;
    double ahead_m_;
    double step_sd_m_;
    Random fresh_;
    std::vector<std::array<float, 2>> lap_steps_;  // unit normal steps that come again every lap
    std::vector<std::array<float, 2>> kerbs_;      // height by cell of the lap
    std::vector<Sides> ring_;
    std::int64_t newest_cell_ = 0;  // negative before the start; the ring is indexed by its low bits
    Sides rough_{};                 // before the contact patch's smoothing
    Sides smoothed_{};
};

}  // namespace holdfast::sim
