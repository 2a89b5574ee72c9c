// SPDX-License-Identifier: MIT
// Wind along the car: a mean vector and first-order gusts.
#pragma once

#include "firmware_host/car/parameters.hpp"
#include "firmware_host/car/random.hpp"

namespace holdfast::sim {

class Wind {
  public:
    Wind(const AirParameters& air, std::uint64_t seed) : air_(air), random_(seed, Stream::wind) {
        gust_mps_ = air.gust_sd_mps * random_.normal();
    }

    // Exact step of the first-order process, whatever dt.
    void step(double dt_s) {
        const double keep = std::exp(-dt_s / air_.gust_time_s);
        gust_mps_ = keep * gust_mps_ + air_.gust_sd_mps * std::sqrt(1.0 - keep * keep) * random_.normal();
    }

    // Head wind of a car on a course (clockwise from north).
    [[nodiscard]] double head_mps(double course_rad) const {
        return air_.wind_mps * std::cos(air_.wind_from_rad - course_rad) + gust_mps_;
    }

  private:
    AirParameters air_;
    Random random_;
    double gust_mps_ = 0.0;
};

}  // namespace holdfast::sim
