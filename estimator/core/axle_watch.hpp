// SPDX-License-Identifier: MIT
// Whether the sensors of one axle agree, and if not, which of them does not. Three relations:
//   sum    sum of the two loads against the ride height: springs and tyres in series, bump stops, dampers, an
//   offset sides  difference of the two loads against the lateral acceleration roll   difference of the left
//   and right ride heights against the lateral acceleration (where there are two)
// One bad load breaks sum and sides by the same amount; one bad height breaks sum and roll; a bad lateral
// acceleration breaks sides and roll of both axles. The relations also stand in for a sensor that is lost.
#pragma once

#include <array>
#include <cstdint>

#include "estimator/core/car.hpp"
#include "estimator/core/intake.hpp"
#include "estimator/core/mean.hpp"
#include "estimator/core/relation.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::core {

class AxleWatch {
  public:
    AxleWatch(const Car& car, bool rear);

    // Samples of a frame, distrusted ones too (their return is to be noticed).
    void see(const Frame& frame);
    // Every kEvery_s: compares, names. accel_y: seen, and trusted enough to learn from.
    static constexpr double kEvery_s = 0.02;
    void judge(double elapsed_s, std::int64_t time_ns, double speed_mps, double accel_y_mps2,
               bool accel_y_seen, bool accel_y_good, HealthTable& health);

    // left - right as the lateral acceleration has it, N, and the mean size of its error.
    [[nodiscard]] double side_difference_n(double accel_y_mps2) const {
        return sides_.predict({accel_y_mps2, 1.0});
    }
    [[nodiscard]] double side_error_n() const { return sides_.level(); }
    // Sum of the loads as the ride height has it (dh against static, m), and the height as the load has it.
    [[nodiscard]] double load_from_height_n(double dh_m, double speed_mps) const;
    [[nodiscard]] double height_from_load_m(double load_n, double speed_mps) const;
    [[nodiscard]] double load_error_n() const { return sum_.level(); }
    // Left side up, rad, as the lateral acceleration has it; 0 where the axle has no pair of sensors.
    [[nodiscard]] double roll_rad(double accel_y_mps2) const;
    // Axle's rate learned (springs and tyres in series, both corners), N/m.
    [[nodiscard]] Quantity rate_npm() const;
    [[nodiscard]] const Relation<4>& sum() const { return sum_; }
    [[nodiscard]] const Relation<2>& sides() const { return sides_; }
    [[nodiscard]] const Relation<2>& roll() const { return roll_; }
    [[nodiscard]] bool sides_broken() const { return sides_.fast_broken() || sides_.slow_broken(); }

  private:
    template <class Visit>
    void for_all_channels(Visit&& visit) const {
        visit(left_);
        visit(right_);
        for (std::size_t i = 0; i < sensor_count_; ++i) visit(sensor_[i].channel);
    }
    void name(Channel c, Fault fault, std::int64_t since_ns, HealthTable& health);
    void look_for_culprit(HealthTable& health);
    void look_for_return(double elapsed_s, HealthTable& health);
    [[nodiscard]] Relation<4>::Vector height_vector(double dh_m, double rate_mps, double speed_mps) const;

    Channel left_, right_;
    double weight_n_;
    double tyre_growth_s2pm_;
    std::array<RideHeightSensor, kMaxRideHeights> sensor_{};
    std::size_t sensor_count_ = 0;
    std::size_t pair_left_ = 0, pair_right_ = 0;
    bool has_pair_ = false;
    double pair_width_m_ = 1.0;

    Relation<4> sum_;
    Relation<2> sides_;
    Relation<2> roll_;
    Mean left_mean_, right_mean_;
    std::array<Mean, kMaxRideHeights> height_mean_{};
    double dh_before_m_ = 0.0;
    bool have_before_ = false;
    double broken_s_ = 0.0;
    std::int64_t strained_since_ns_ = 0;
    bool strained_ = false;
    bool began_fast_ = false;
    double restored_s_ = 0.0;
    std::uint64_t named_ = 0;  // channels that this watch distrusts
};

}  // namespace holdfast::core
