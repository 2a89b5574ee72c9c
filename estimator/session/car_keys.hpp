// SPDX-License-Identifier: MIT
// The keys of the car file: one record each, from which the reader, the range check and the printed reference
// come.
#pragma once

#include <cstddef>
#include <cstdint>
#include <iosfwd>
#include <optional>
#include <span>
#include <string_view>

#include "estimator/core/car.hpp"

namespace holdfast::session {

// Table of the ride-height sensors: one for each sensor's name.
inline constexpr std::string_view kSensorTable = "ride_height.NAME";

// Standard uncertainty where the file gives none.
struct DefaultSd {
    enum class Kind : std::uint8_t { exact, absolute, share_of_value };
    Kind kind = Kind::exact;
    double size = 0.0;

    [[nodiscard]] double of(double value) const;
};

// Where a value of the file goes. `sensor` counts the ride-height sensors and matters only in kSensorTable.
using SetCarValue = void (*)(core::Car& car, std::size_t sensor, const core::Quantity& given);

struct CarKey {
    enum class Need : std::uint8_t { needed, has_default, optional };

    std::string_view table;
    std::string_view key;
    std::string_view unit;
    double least;
    double most;
    Need need;
    double fallback;  // value where absent, with Need::has_default
    DefaultSd sd;     // of Kind::exact: the estimator has no use for an uncertainty of it
    std::string_view meaning;
    SetCarValue set;
};

[[nodiscard]] std::span<const CarKey> car_keys();

// Every key with unit, range, default, uncertainty and meaning, as Markdown tables.
void print_key_reference(std::ostream& out);

}  // namespace holdfast::session
