// SPDX-License-Identifier: MIT
// Speed from the lap distance, where it is logged: how far the car came in a fifth of a second. It has no
// wheel slip in it and no share in the speed sensor's faults, unless the logger makes it from that very
// sensor; then it tells of nothing, and does no harm.
#pragma once

#include <cmath>
#include <optional>

namespace holdfast::core {

class DistanceSpeed {
  public:
    // Means over the newest window, m/s: from the distance, and of two others that were told beside it.
    struct Window {
        double by_distance_mps = 0.0;
        double filter_mps = 0.0;
        double sensor_mps = 0.0;
        double span_s = 0.0;
    };
    // A sample of the distance, with the filter's speed and the sensor's (slip taken out) at that instant;
    // something where it ends a window. A new lap, a pause or a jump begins a new window.
    std::optional<Window> add(double time_s, double distance_m, double filter_mps, double sensor_mps) {
        const double step_s = time_s - time_s_, step_m = distance_m - distance_m_;
        const bool goes_on = began_ && step_s < kPause_s && step_m >= 0.0 && step_m < kJump_m;
        if (goes_on) {
            // Over each step, by the mean of its two ends.
            filter_m_ += 0.5 * step_s * (filter_mps + filter_mps_);
            sensor_m_ += 0.5 * step_s * (sensor_mps + sensor_mps_);
        }
        time_s_ = time_s;
        distance_m_ = distance_m;
        filter_mps_ = filter_mps;
        sensor_mps_ = sensor_mps;
        const double span_s = time_s - from_s_;
        if (goes_on && span_s < kWindow_s) return std::nullopt;
        const Window window{(distance_m - from_m_) / span_s, filter_m_ / span_s, sensor_m_ / span_s, span_s};
        began_ = true;
        from_s_ = time_s;
        from_m_ = distance_m;
        filter_m_ = sensor_m_ = 0.0;
        if (!goes_on) return std::nullopt;
        return window;
    }

  private:
    static constexpr double kWindow_s = 0.2;
    static constexpr double kPause_s = 0.1;
    static constexpr double kJump_m = 20.0;

    bool began_ = false;
    double from_s_ = 0.0, from_m_ = 0.0;
    double time_s_ = 0.0, distance_m_ = 0.0;
    double filter_mps_ = 0.0, sensor_mps_ = 0.0;
    double filter_m_ = 0.0, sensor_m_ = 0.0;
};

}  // namespace holdfast::core
