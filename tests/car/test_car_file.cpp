// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <cmath>
#include <cstdlib>

#include "firmware_host/car/car_file.hpp"

namespace {

using namespace holdfast::sim;

// Value of the first `key = number` after `[table]`.
double value_of(const std::string& text, const std::string& table, const std::string& key) {
    const auto from = text.find("[" + table + "]");
    REQUIRE(from != std::string::npos);
    const auto at = text.find("\n" + key + " = ", from);
    REQUIRE(at != std::string::npos);
    return std::strtod(text.c_str() + at + key.size() + 4, nullptr);
}

}  // namespace

TEST_CASE("without the workshop's errors the car file is the true car") {
    const Scenario s = make_scenario("prototype", 3);
    const std::string text = car_file_text(s, 0.0);
    CHECK(value_of(text, "car", "mass") == Approx(s.chassis.mass_kg).epsilon(1e-6));
    CHECK(value_of(text, "car", "wheelbase") == Approx(s.chassis.wheelbase_m).epsilon(1e-6));
    CHECK(value_of(text, "rear", "wheel_rate") == Approx(s.chassis.rear.wheel_rate_npm).epsilon(1e-6));
    CHECK(value_of(text, "rear", "anti_squat") == Approx(s.chassis.rear.anti_squat_share).epsilon(1e-6));
    CHECK(value_of(text, "flap", "chord") == Approx(s.flap.chord_m).epsilon(1e-6));
    CHECK(value_of(text, "ride_height", "tyre_growth") == Approx(s.chassis.tyre_growth_s2pm).epsilon(1e-6));
    CHECK(text.find("front_left = { static = ") != std::string::npos);
}

TEST_CASE("the workshop is off by its standard uncertainties, seeds 1 to 600") {
    Scenario s = make_scenario("open_wheel", 1);
    double mass2 = 0.0;
    double rate2 = 0.0;
    double dive2 = 0.0;
    constexpr int kCars = 600;
    for (int seed = 1; seed <= kCars; ++seed) {
        s.seed = static_cast<std::uint64_t>(seed);
        const std::string text = car_file_text(s);
        mass2 += std::pow(value_of(text, "car", "mass") / s.chassis.mass_kg - 1.0, 2);
        rate2 += std::pow(value_of(text, "front", "wheel_rate") / s.chassis.front.wheel_rate_npm - 1.0, 2);
        dive2 += std::pow(value_of(text, "front", "anti_dive") - s.chassis.front.anti_brake_share, 2);
    }
    CHECK(std::sqrt(mass2 / kCars) == Approx(0.005).epsilon(0.12));
    CHECK(std::sqrt(rate2 / kCars) == Approx(0.03).epsilon(0.12));
    CHECK(std::sqrt(dive2 / kCars) == Approx(0.03).epsilon(0.12));
}

TEST_CASE("the same seed gives the same car file") {
    CHECK(car_file_text(make_scenario("heavy_closed", 8)) == car_file_text(make_scenario("heavy_closed", 8)));
    CHECK(car_file_text(make_scenario("heavy_closed", 8)) != car_file_text(make_scenario("heavy_closed", 9)));
}
