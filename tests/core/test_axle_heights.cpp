// SPDX-License-Identifier: MIT
// The height sensors of an axle as one, roll taken out.
#include <catch2/catch.hpp>

#include "estimator/core/axle_heights.hpp"
#include "tests/core/small_car.hpp"

namespace {

using namespace holdfast;
using namespace holdfast::core;
using holdfast::testing::small_car;

// A frame of the small car's three heights: rise of the axle and roll of the body (left side up).
Frame heights(double front_m, double rear_m, double roll_rad) {
    const Car car = small_car();
    Frame frame;
    for (std::size_t i = 0; i < car.ride_height_count; ++i) {
        const RideHeightSensor& s = car.ride_height[i];
        frame.set(s.channel, s.static_m.value + (s.x_m > -1.7 ? front_m : rear_m) + s.y_m * roll_rad);
    }
    return frame;
}

}  // namespace

TEST_CASE("heights of an axle: roll is taken out, and told where two sensors stand apart") {
    AxleHeights front(small_car(), false), rear(small_car(), true);
    CHECK(front.count() == 1);
    CHECK(rear.count() == 2);
    CHECK_FALSE(front.can_tell_roll());
    CHECK(rear.can_tell_roll());
    CHECK(front.x_m() == Approx(0.25));
    CHECK(rear.x_m() == Approx(-3.6));
    const Frame frame = heights(-0.011, -0.023, 0.02);
    const auto at_rear = rear.take(frame, frame.present, 0.0);
    REQUIRE(at_rear);
    CHECK(at_rear->dh_m == Approx(-0.023).margin(1e-12));
    CHECK(at_rear->noise_gain == Approx(0.5));  // a mean of two
    CHECK(rear.roll_rad() == Approx(0.02).margin(1e-12));
    const auto at_front = front.take(frame, frame.present, rear.roll_rad());
    REQUIRE(at_front);
    CHECK(at_front->dh_m == Approx(-0.011).margin(1e-12));
    CHECK(at_front->noise_gain == Approx(1.0));
}

TEST_CASE("heights of an axle with one sensor left: the roll known from elsewhere stands in") {
    AxleHeights rear(small_car(), true);
    Frame frame = heights(-0.011, -0.023, 0.02);
    frame.erase(ride_height_channel(2));
    const auto height = rear.take(frame, frame.present, 0.02);
    REQUIRE(height);
    CHECK(height->dh_m == Approx(-0.023).margin(1e-12));
    CHECK(height->noise_gain == Approx(1.0));
    CHECK_FALSE(rear.take(frame, 0, 0.02));  // nothing admitted, nothing said
}
