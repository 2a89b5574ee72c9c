// SPDX-License-Identifier: MIT
// The car file held against what an outing taught: where they disagree by more than their uncertainties let
// them, and what the file should say instead.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "estimator/core/car.hpp"
#include "estimator/core/learned.hpp"
#include "estimator/session/car_file_edit.hpp"

namespace holdfast::outputs {

// Beyond so many standard uncertainties of their difference file and data are said to disagree. Of values
// that are what the file says, one in twenty is farther off than that.
inline constexpr double kDisagreeFrom = 2.0;

struct Comparison {
    std::string what;      // "rear wheel_rate"
    std::string unit;      // for a person: "N/mm"
    double unit_si = 1.0;  // one of it in SI
    core::Quantity file;   // SI
    core::Quantity data;
    std::string table;  // of the car file, with the key that data would correct; empty: no key tells it
    std::string key;
    std::string why_not;  // where no key tells it: why

    // Difference over its standard uncertainty.
    [[nodiscard]] double apart() const;
    [[nodiscard]] bool disagrees() const { return apart() > kDisagreeFrom; }
};

// The wheel rate of one corner from the rate of springs and tyres in series (both corners) and the tyre's,
// with both their uncertainties. Nothing where the series is not softer than the tyres alone.
[[nodiscard]] std::optional<core::Quantity> wheel_rate_npm(const core::Quantity& series_npm,
                                                           const core::Quantity& tyre_npm);

[[nodiscard]] std::vector<Comparison> compare(const core::Car& car, const core::Learned& learned);

// One line for a person.
[[nodiscard]] std::string sentence(const Comparison& comparison);

// The values of the file that should change: those that disagree and have a key.
[[nodiscard]] std::vector<session::CarFileChange> proposals(const std::vector<Comparison>& comparisons);

}  // namespace holdfast::outputs
