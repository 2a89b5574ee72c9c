// SPDX-License-Identifier: MIT
// The road's roughness and the ride-height noise under one axle, found from the innovations themselves: white
// ones of the predicted size mean that both are right. Innovations that keep their sign ask for a rougher
// road; ones that are too large without that ask for more sensor noise. (Mehra, IEEE Trans. Automatic Control
// AC-15, 1970.)
#pragma once

#include <algorithm>
#include <cmath>

namespace holdfast::core {

class RoadTuning {
  public:
    // Spectral density of the road's vertical velocity at this speed, m^2/s, two-sided: ISO 8608 with
    // exponent 2, 2 (pi n0)^2 Gd(n0) V, n0 = 0.1 cycles/m.
    [[nodiscard]] double density_m2ps(double speed_mps) const {
        constexpr double kPi = 3.14159265358979;
        return 2.0 * (kPi * 0.1) * (kPi * 0.1) * roughness_m3_ * std::max(speed_mps, 1.0);
    }
    [[nodiscard]] double noise_factor() const { return noise_factor_; }  // on the sensor's variance
    [[nodiscard]] double roughness_m3() const { return roughness_m3_; }
    // Slow part of the innovations' variance over what white ones would have: 1 where all is right.
    [[nodiscard]] double colour() const { return std::max(colour_, 1.0); }

    void learn(double innovation, double variance, double interval_s) {
        const double z = std::clamp(innovation / std::sqrt(variance), -5.0, 5.0);
        const double rate = std::min(interval_s / kMemory_s, 0.1);
        roughness_m3_ =
            std::clamp(roughness_m3_ * std::exp(rate * kRoadPull * z * before_), kLeast_m3, kMost_m3);
        noise_factor_ = std::clamp(noise_factor_ * std::exp(rate * (z * z - 1.0 - z * before_)), 0.2, 30.0);
        before_ = z;
        block_ += z;
        block_time_s_ += interval_s;
        block_count_ += 1.0;
        if (block_time_s_ >= kBlock_s) {
            const double ratio = std::min(block_ * block_ / block_count_, 9.0);
            colour_ += 0.01 * (ratio - colour_);
            block_ = block_time_s_ = block_count_ = 0.0;
        }
    }
    void restart() { before_ = block_ = block_time_s_ = block_count_ = 0.0; }

  private:
    static constexpr double kLeast_m3 = 0.02e-6;
    static constexpr double kMost_m3 = 64e-6;  // ISO 8608 class B's mean
    static constexpr double kMemory_s = 3.0;
    static constexpr double kRoadPull = 2.0;
    static constexpr double kBlock_s = 0.05;

    double roughness_m3_ = 2e-6;
    double noise_factor_ = 1.0;
    double before_ = 0.0;
    double block_ = 0.0, block_time_s_ = 0.0, block_count_ = 0.0;
    double colour_ = 1.0;
};

}  // namespace holdfast::core
