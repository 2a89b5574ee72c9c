// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <limits>
#include <random>

#include "estimator/core/zones.hpp"

using holdfast::core::Zones;

TEST_CASE("brake points that scatter by some metres keep their zone's number over the laps, seed 1") {
    std::mt19937_64 random(1);
    std::normal_distribution<double> scatter(0.0, 8.0);
    Zones zones;
    for (int lap = 0; lap < 50; ++lap) {
        CHECK(zones.at(620.0 + scatter(random)) == 1);
        CHECK(zones.at(1540.0 + scatter(random)) == 2);
        CHECK(zones.at(2900.0 + scatter(random)) == 3);
    }
}

TEST_CASE("a place found late between two known ones takes the next free number; the others keep theirs") {
    Zones zones;
    CHECK(zones.at(600.0) == 1);
    CHECK(zones.at(2000.0) == 2);
    CHECK(zones.at(1300.0) == 3);
    CHECK(zones.at(605.0) == 1);
    CHECK(zones.at(1995.0) == 2);
}

TEST_CASE("no lap distance: no zone; more places than fit: no zone, and the known ones stay") {
    Zones zones;
    CHECK(zones.at(std::numeric_limits<double>::quiet_NaN()) == Zones::kUnknown);
    for (std::size_t i = 0; i < Zones::kCapacity; ++i) {
        CHECK(zones.at(1000.0 * static_cast<double>(i)) == static_cast<std::int32_t>(i + 1));
    }
    CHECK(zones.at(1e6) == Zones::kUnknown);
    CHECK(zones.at(3001.0) == 4);
}
