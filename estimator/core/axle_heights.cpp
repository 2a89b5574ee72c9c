// SPDX-License-Identifier: MIT
#include "estimator/core/axle_heights.hpp"

#include <algorithm>
#include <cmath>

namespace holdfast::core {
namespace {

constexpr double kSpreadForRoll_m2 = 0.01;  // sum of squared distances from the mean: 0.1 m apart at least
constexpr double kNoiseLeast_m = 0.05e-3;   // resolution of a laser height sensor; common practice, no source
constexpr double kNoiseUnknown_m = 0.3e-3;

}  // namespace

AxleHeights::AxleHeights(const Car& car, bool rear) {
    for (std::size_t i = 0; i < car.ride_height_count; ++i) {
        const RideHeightSensor& s = car.ride_height[i];
        const bool is_rear = s.x_m < -0.5 * car.wheelbase_m;
        if (is_rear != rear) continue;
        sensor_[count_++] = s;
        x_m_ += s.x_m;
    }
    if (count_ == 0) return;
    x_m_ /= static_cast<double>(count_);
    double mean_y = 0.0;
    double spread = 0.0;
    for (std::size_t i = 0; i < count_; ++i) mean_y += sensor_[i].y_m / static_cast<double>(count_);
    for (std::size_t i = 0; i < count_; ++i) spread += (sensor_[i].y_m - mean_y) * (sensor_[i].y_m - mean_y);
    can_tell_roll_ = spread > kSpreadForRoll_m2;
}

std::optional<AxleHeights::Height> AxleHeights::take(const Frame& frame, std::uint64_t admitted,
                                                     double roll_rad) {
    double n = 0.0, sum_y = 0.0, sum_yy = 0.0, sum_h = 0.0, sum_yh = 0.0;
    for (std::size_t i = 0; i < count_; ++i) {
        const std::size_t slot = index(sensor_[i].channel);
        if (((admitted >> slot) & 1U) == 0) continue;
        const double h = frame.value[slot] - sensor_[i].static_m.value;
        const double y = sensor_[i].y_m;
        n += 1.0;
        sum_y += y;
        sum_yy += y * y;
        sum_h += h;
        sum_yh += y * h;
    }
    if (n == 0.0) return std::nullopt;
    Height out;
    const double mean_y = sum_y / n;
    const double spread = sum_yy - n * mean_y * mean_y;
    if (spread >
        kSpreadForRoll_m2) {  // straight line over y: its value at the centre line, its slope is the roll
        roll_rad_ = (sum_yh - mean_y * sum_h) / spread;
        out.dh_m = sum_h / n - mean_y * roll_rad_;
        out.noise_gain = 1.0 / n + mean_y * mean_y / spread;
    } else {
        out.dh_m = sum_h / n - mean_y * roll_rad;
        out.noise_gain = 1.0 / n;
    }
    last_sample_s_ = frame.time_s();
    dh_m_ = out.dh_m;
    return out;
}

void AxleHeights::stand_in(double dh_m, double time_s) {
    dh_m_ = dh_m;
    stood_in_s_ = time_s;
}

double AxleHeights::noise_sd_m(const Intake& intake) const {
    double sum = 0.0, n = 0.0;
    for (std::size_t i = 0; i < count_; ++i) {
        const double sd = intake.noise_sd(sensor_[i].channel);
        if (sd > 0.0) {
            sum += sd;
            n += 1.0;
        }
    }
    return n > 0.0 ? std::max(sum / n, kNoiseLeast_m) : kNoiseUnknown_m;
}

}  // namespace holdfast::core
