// SPDX-License-Identifier: MIT
// Braking zones: places of the lap where the brakes come on, numbered along the lap as they are first seen. A
// place found later between two known ones takes the next free number: a number once given stays.
#pragma once

#include <array>
#include <cstddef>
#include <cstdint>

namespace holdfast::core {

class Zones {
  public:
    static constexpr std::size_t kCapacity = 64;
    static constexpr std::int32_t kUnknown = -1;  // no lap distance, or more places than fit

    // The brakes came on at this distance; NaN where it is not known.
    [[nodiscard]] std::int32_t at(double lap_distance_m);

  private:
    std::array<double, kCapacity> distance_m_{};
    std::array<std::uint32_t, kCapacity> seen_{};
    std::size_t count_ = 0;
};

}  // namespace holdfast::core
