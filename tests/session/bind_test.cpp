// SPDX-License-Identifier: MIT
#include "estimator/session/bind.hpp"

#include <catch2/catch.hpp>

#include "estimator/session/needed_channels.hpp"
#include "tests/session/small_car.hpp"
#include "tests/session/small_log.hpp"

namespace holdfast::session {
namespace {

using namespace holdfast::testing;
using Catch::Contains;

CarFile small_car(const std::string& flap = "") {
    const TempFolder folder;
    std::string text = kSmallCar;
    text.insert(text.find("chord"), flap);
    auto car = read_car_file(write_file(folder, "car.toml", text));
    if (!car) FAIL(to_string(car.errors()));
    return *car;
}

// With every channel that is needed.
StreamInfo stream_with(std::vector<std::string> names) {
    StreamInfo stream;
    for (const Channel channel : kNeededChannels) stream.channels |= std::uint64_t{1} << index(channel);
    stream.ride_height_names = std::move(names);
    stream.origin = "log.csv";
    return stream;
}

TEST_CASE("each sensor of the car gets the slot that carries its name") {
    const auto bound =
        bind_ride_heights(small_car(), stream_with({"front", "extra", "rear_right", "rear_left"}));
    REQUIRE(bound);
    REQUIRE(bound->car.ride_height_count == 3);
    // The car file's order: rear_left, front, rear_right.
    CHECK(bound->car.ride_height[0].channel == ride_height_channel(3));
    CHECK(bound->car.ride_height[1].channel == ride_height_channel(0));
    CHECK(bound->car.ride_height[2].channel == ride_height_channel(2));
    CHECK(bound->car.ride_height[1].x_m == 0.25);
    CHECK(bound->channels_without_sensor == std::vector<std::string>{"extra"});
    CHECK(bound->sensors_without_channel.empty());
}

TEST_CASE("a sensor that the log lacks is dropped and listed") {
    const auto bound = bind_ride_heights(small_car(), stream_with({"rear_right", "front"}));
    REQUIRE(bound);
    REQUIRE(bound->car.ride_height_count == 2);
    CHECK(bound->car.ride_height[0].channel == ride_height_channel(1));
    CHECK(bound->car.ride_height[0].x_m == 0.25);
    CHECK(bound->car.ride_height[1].channel == ride_height_channel(0));
    CHECK(bound->car.ride_height[1].y_m == -0.45);
    CHECK(bound->sensors_without_channel == std::vector<std::string>{"rear_left"});
}

TEST_CASE("an axle without a ride height is an error that says which would do") {
    const Errors rear = check_against(small_car(), stream_with({"front", "elsewhere"}));
    REQUIRE(rear.size() == 1);
    CHECK(rear[0].file == "log.csv");
    CHECK_THAT(rear[0].message,
               Contains("rear axle") && Contains("ride_height_rear_left, ride_height_rear_right"));
    CHECK_FALSE(bind_ride_heights(small_car(), stream_with({"front", "elsewhere"})));

    const Errors front = check_against(small_car(), stream_with({"rear_left"}));
    REQUIRE(front.size() == 1);
    CHECK_THAT(front[0].message, Contains("front axle") && Contains("expected ride_height_front"));

    CHECK(check_against(small_car(), stream_with({"front", "rear_right"})).empty());

    CarFile without_front = small_car();
    without_front.car.ride_height[1].x_m = -3.0;
    const Errors unplaced = check_against(without_front, stream_with({"front", "rear_left"}));
    REQUIRE(unplaced.size() == 1);
    CHECK_THAT(unplaced[0].file, Catch::EndsWith("car.toml"));
    CHECK_THAT(unplaced[0].message, Contains("no sensor at the front axle"));
}

TEST_CASE("a stream that lacks a needed channel is an error that names it") {
    for (const Channel channel : kNeededChannels) {
        StreamInfo stream = stream_with({"front", "rear_left"});
        stream.channels &= ~(std::uint64_t{1} << index(channel));
        const Errors errors = check_against(small_car(), stream);
        REQUIRE(errors.size() == 1);
        CHECK(errors[0].file == "log.csv");
        CHECK_THAT(errors[0].message, Contains(std::string(info(channel).name)) && Contains("expected"));
    }
}

TEST_CASE("a flap angle needs both ends of travel in the car file") {
    StreamInfo stream = stream_with({"front", "rear_left"});
    stream.channels |= std::uint64_t{1} << index(Channel::flap_angle);
    stream.channels &= ~(std::uint64_t{1} << index(Channel::flap_position));
    const Errors errors = check_against(small_car(), stream);
    REQUIRE(errors.size() == 1);
    CHECK_THAT(errors[0].file, Catch::EndsWith("car.toml"));
    CHECK_THAT(errors[0].message, Contains("log.csv") && Contains("closed_angle") && Contains("open_angle"));
    CHECK(check_against(small_car("closed_angle = 50\nopen_angle = 10\n"), stream).empty());
}

TEST_CASE("a flap angle becomes a position, 0 closed and 1 open") {
    const FrameAdapter adapter(small_car("closed_angle = 50\nopen_angle = 10\n").car);
    const auto position = [&](double angle_deg) {
        Frame frame;
        frame.set(Channel::flap_angle, angle_deg * 3.14159265358979324 / 180.0);
        adapter.apply(frame);
        CHECK_FALSE(frame.has(Channel::flap_angle));
        REQUIRE(frame.has(Channel::flap_position));
        return frame.get(Channel::flap_position);
    };
    CHECK(position(50) == Approx(0.0).margin(1e-12));
    CHECK(position(10) == Approx(1.0));
    CHECK(position(40) == Approx(0.25));
}

TEST_CASE("frames without a flap angle pass as they are") {
    const FrameAdapter adapter(small_car("closed_angle = 50\nopen_angle = 10\n").car);
    Frame frame;
    frame.set(Channel::flap_position, 0.3);
    const std::uint64_t present = frame.present;
    adapter.apply(frame);
    CHECK(frame.present == present);
    CHECK(frame.get(Channel::flap_position) == 0.3);
}

}  // namespace
}  // namespace holdfast::session
