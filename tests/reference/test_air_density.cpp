// SPDX-License-Identifier: MIT
// Density of moist air and of the standard atmosphere against published tables.
#include <catch2/catch.hpp>

#include "estimator/core/air.hpp"

using holdfast::core::moist_air_density;
using holdfast::core::standard_air_density;

TEST_CASE("moist air after CIPM-2007 (Picard et al., Metrologia 45, 2008)") {
    // 20 degC, 101325 Pa, 50 %: computed from the published equation in a separate program.
    CHECK(moist_air_density(293.15, 101325.0, 0.5) == Approx(1.1993139).margin(2e-7));
    // 10 degC, 730 mmHg, 40 %: published table, quoted at second hand, five decimals.
    CHECK(moist_air_density(283.15, 730.0 * 133.322387, 0.4) == Approx(1.19569).margin(1e-5));
}

TEST_CASE("moist air: lighter when damper, warmer or thinner; humidity is clamped to 0..1") {
    const double usual = moist_air_density(293.15, 101325.0, 0.5);
    CHECK(moist_air_density(293.15, 101325.0, 0.9) < usual);
    CHECK(moist_air_density(303.15, 101325.0, 0.5) < usual);
    CHECK(moist_air_density(293.15, 95000.0, 0.5) < usual);
    CHECK(moist_air_density(293.15, 101325.0, 1.2) == moist_air_density(293.15, 101325.0, 1.0));
    CHECK(moist_air_density(293.15, 101325.0, -0.05) == moist_air_density(293.15, 101325.0, 0.0));
}

TEST_CASE("standard atmosphere, ISO 2533, geopotential altitude") {
    CHECK(standard_air_density(0.0) == Approx(1.22500).margin(5e-6));
    CHECK(standard_air_density(1000.0) == Approx(1.11164).margin(5e-6));
    CHECK(standard_air_density(2000.0) == Approx(1.00649).margin(5e-6));
}
