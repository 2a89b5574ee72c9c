// SPDX-License-Identifier: MIT
// Annual flow of the Nile at Aswan, 1871-1970, 1e8 m^3: R's datasets::Nile, the series of Durbin & Koopman,
// Time Series Analysis by State Space Methods, 2nd ed., ch. 2. Local level model with the book's variances.
#pragma once

#include <array>

namespace holdfast::testing {

inline constexpr double kNileNoise = 15099.0;      // of a measurement
inline constexpr double kNileLevelNoise = 1469.1;  // of the level from year to year

inline constexpr std::array<double, 100> kNile{
    1120, 1160, 963,  1210, 1160, 1160, 813,  1230, 1370, 1140, 995,  935,  1110, 994, 1020, 960,  1180,
    799,  958,  1140, 1100, 1210, 1150, 1250, 1260, 1220, 1030, 1100, 774,  840,  874, 694,  940,  833,
    701,  916,  692,  1020, 1050, 969,  831,  726,  456,  824,  702,  1120, 1100, 832, 764,  821,  768,
    845,  864,  862,  698,  845,  744,  796,  1040, 759,  781,  865,  845,  944,  984, 897,  822,  1010,
    771,  676,  649,  846,  812,  742,  801,  1040, 860,  874,  848,  890,  744,  749, 838,  1050, 918,
    986,  797,  923,  975,  815,  1020, 906,  901,  1170, 912,  746,  919,  718,  714, 740};

// Years 21 to 40 and 61 to 80 of the series, counted from 1: the book's missing observations.
[[nodiscard]] constexpr bool nile_missing(std::size_t year) {
    return (year >= 21 && year <= 40) || (year >= 61 && year <= 80);
}

}  // namespace holdfast::testing
