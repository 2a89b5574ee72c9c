// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <cmath>

#include "estimator/outputs/zones.hpp"
#include "tests/outputs/examples.hpp"

using namespace holdfast;
using examples::known_closure;

TEST_CASE("closings are gathered by zone, medians over the laps") {
    std::vector<core::Closure> closures;
    for (int lap = 1; lap <= 3; ++lap) {
        core::Closure c = known_closure();
        c.zone = 2;
        c.time_command_s = 100.0 * lap;
        c.time_brake_s = 100.0 * lap + 0.1 * lap;  // leads 0.1, 0.2, 0.3
        c.margin_s = {0.05 * lap, 0.01};
        c.lap_distance_brake_m = 1000.0 + lap;
        closures.push_back(c);
    }
    closures[0].verdict = core::Verdict::short_of;
    closures[2].slow = true;
    core::Closure other = known_closure();
    other.zone = 1;
    other.lap_distance_brake_m = std::nan("");
    other.reattachment_known = false;
    closures.push_back(other);
    core::Closure unbraked = known_closure();
    unbraked.zone = 0;
    unbraked.braked = false;
    closures.push_back(unbraked);

    const auto table = outputs::zones(closures);
    REQUIRE(table.size() == 2);
    CHECK(table[0].number == 1);
    CHECK(std::isnan(table[0].distance_brake_m));
    CHECK(std::isnan(table[0].margin_median_s));
    CHECK(table[1].number == 2);
    CHECK(table[1].closures == 3);
    CHECK(table[1].short_of == 1);
    CHECK(table[1].slow == 1);
    CHECK(table[1].lead_now_s == Approx(0.2));
    CHECK(table[1].margin_median_s == Approx(0.1));
    CHECK(table[1].distance_brake_m == Approx(1002.0));
}

TEST_CASE("zones.csv leaves unknown numbers and the advice columns empty") {
    core::Closure c = known_closure();
    c.reattachment_known = false;
    c.lap_distance_brake_m = std::nan("");
    c.time_command_s = 10.0;
    c.time_brake_s = 10.25;
    CHECK(outputs::zones_csv(outputs::zones(std::vector{c})) ==
          "zone,distance_brake,closures,short,slow,lead_now,margin_median,lead_advised,lead_advised_distance,"
          "risk,lap_time_cost\n"
          "3,,1,0,0,0.25,,,,,\n");
}
