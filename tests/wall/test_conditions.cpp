// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>

#include "estimator/wall/conditions.hpp"
#include "estimator/wall/messages.hpp"

using namespace holdfast;

namespace {

Frame frame_with(Channel channel, double value) {
    Frame frame{};
    frame.set(channel, value);
    return frame;
}

core::Estimate estimate(std::uint32_t flags, double speed_mps, double air_speed_mps) {
    core::Estimate e;
    e.flags = flags;
    e.speed_mps = speed_mps;
    e.air_speed_mps = air_speed_mps;
    e.air_density_kgpm3 = 1.2;
    return e;
}

}  // namespace

TEST_CASE("conditions are ranges of what came and can be believed") {
    wall::Conditions c;
    CHECK_FALSE(c.air_temperature_k.known());
    for (const double kelvin : {295.0, 297.5, 296.0, 9999.0})
        c.take(frame_with(Channel::air_temperature, kelvin));
    c.take(frame_with(Channel::lap, 3.0));
    CHECK(c.air_temperature_k.least == 295.0);
    CHECK(c.air_temperature_k.most == 297.5);
    CHECK(c.lap.least == 3.0);
    CHECK_FALSE(c.air_pressure_pa.known());
}

TEST_CASE("wind along the car is known only where the air speed is measured, at speed") {
    wall::Conditions c;
    c.take(estimate(core::kGroundReference, 60.0, 60.0));
    c.take(estimate(0, 10.0, 20.0));
    c.take(estimate(core::kNotConverged, 60.0, 80.0));
    CHECK_FALSE(c.headwind_mps());
    c.take(estimate(0, 60.0, 64.0));
    c.take(estimate(0, 60.0, 58.0));
    REQUIRE(c.headwind_mps());
    CHECK(c.headwind_mps()->value == Approx(1.0));
    CHECK(c.headwind_mps()->sd == Approx(3.0));
}

TEST_CASE("the standard atmosphere is no measured density, and what is not known is null in the message") {
    wall::Conditions c;
    c.take(estimate(core::kStandardAir | core::kGroundReference, 60.0, 60.0));
    c.take(frame_with(Channel::air_pressure, 100300.0));
    const auto json = nlohmann::json::parse(wall::end_json({true, "{}", c}))["conditions"];
    CHECK(json["air_density"].is_null());
    CHECK(json["headwind"].is_null());
    CHECK(json["air_pressure"] == nlohmann::json{100300.0, 100300.0});
}
