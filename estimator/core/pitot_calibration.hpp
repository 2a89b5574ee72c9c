// SPDX-License-Identifier: MIT
// The pitot's scale, found against the speed over ground: over a lap the wind is with the car as often as
// against it, so that what stays is the pitot's own error. MODEL.md [pitot]:
//   measured / (1/2 density V^2) = scale (1 + u / V)^2,   u = u_N cos(course) + u_E sin(course)
#pragma once

#include <algorithm>
#include <cmath>

#include "estimator/core/ud_filter.hpp"

namespace holdfast::core {

class PitotCalibration {
  public:
    PitotCalibration() {
        filter_.set_diagonal({kScaleSd * kScaleSd, kWindSd_mps * kWindSd_mps, kWindSd_mps * kWindSd_mps});
        filter_.x[kScale] = 1.0;
    }

    // Every interval_s at more than kFrom_mps: measured over ground pressure. unseen_turn_rad: by how much
    // the car has turned since, where the course is not known (it is 0 then).
    void learn(double ratio, double speed_mps, double course_rad, double unseen_turn_rad, double interval_s) {
        const double keep = std::exp(-unseen_turn_rad);
        if (unseen_turn_rad > 0.0) {
            filter_.x[kNorth] *= keep;
            filter_.scale_state(kNorth, keep);
            filter_.add_noise(kNorth, kWindSd_mps * kWindSd_mps * (1.0 - keep * keep));
        }
        filter_.add_noise(kNorth, kWindDrift_mps * kWindDrift_mps * interval_s);
        filter_.add_noise(kEast, kWindDrift_mps * kWindDrift_mps * interval_s);
        const double cosine = std::cos(course_rad), sine = std::sin(course_rad);
        const double share = 1.0 + (filter_.x[kNorth] * cosine + filter_.x[kEast] * sine) / speed_mps;
        const double predicted = filter_.x[kScale] * share * share;
        const double per_wind = 2.0 * filter_.x[kScale] * share / speed_mps;
        off_mps_ +=
            std::min(interval_s / kSettle_s, 1.0) * (0.5 * speed_mps * (ratio - predicted) - off_mps_);
        // Gusts keep their sign for a second or two: one sample among many tells little.
        const double gust = 2.0 * kGust_mps / speed_mps;
        (void)filter_.expect({share * share, per_wind * cosine, per_wind * sine},
                             gust * gust * 2.0 * kGustTime_s / interval_s);
        if (!broken()) filter_.apply(ratio - predicted);
    }
    [[nodiscard]] double scale() const { return filter_.x[kScale]; }
    [[nodiscard]] double scale_sd() const { return std::sqrt(filter_.variance(kScale)); }
    // The air speed has been away from what wind and scale explain for about a second, by more than gusts
    // make.
    [[nodiscard]] bool broken() const { return std::abs(off_mps_) >= kOff_mps; }
    [[nodiscard]] bool suspect() const { return std::abs(off_mps_) >= 0.5 * kOff_mps; }

    static constexpr double kFrom_mps = 25.0;

  private:
    enum State : std::size_t { kScale, kNorth, kEast };
    static constexpr double kScaleSd = 0.015;
    static constexpr double kWindSd_mps = 3.0;
    static constexpr double kWindDrift_mps = 0.05;
    static constexpr double kGust_mps = 0.7, kGustTime_s = 1.5;
    static constexpr double kSettle_s = 1.0;
    static constexpr double kOff_mps = 4.5;

    UdFilter<double, 3> filter_;
    double off_mps_ = 0.0;
};

}  // namespace holdfast::core
