// SPDX-License-Identifier: MIT
#include <bit>
#include <catch2/catch.hpp>
#include <cmath>
#include <limits>
#include <random>

#include "estimator/session/csv_writer.hpp"
#include "tests/session/small_log.hpp"

namespace holdfast::session {
namespace {

using namespace holdfast::testing;

StreamInfo every_channel(Channel flap) {
    StreamInfo stream;
    stream.ride_height_names = {"front", "rear_left", "with, comma", "with \"quote\"", "[m]"};
    for (std::size_t i = 0; i < index(Channel::ride_height_0) + stream.ride_height_names.size(); ++i) {
        stream.channels |= std::uint64_t{1} << i;
    }
    // A log has the flap's position as a share or as an angle, not both.
    const Channel other = flap == Channel::flap_angle ? Channel::flap_position : Channel::flap_angle;
    stream.channels &= ~(std::uint64_t{1} << index(other));
    return stream;
}

// Any double there is, with the odd ones made frequent.
double any_number(std::mt19937_64& random) {
    switch (random() % 8) {
        case 0:
            return -0.0;
        case 1:
            return std::numeric_limits<double>::infinity();
        case 2:
            return std::numeric_limits<double>::quiet_NaN();
        case 3:
            return std::numeric_limits<double>::denorm_min() * static_cast<double>(random() % 100);
        case 4:
            return static_cast<double>(random() % 100'000) / 1000.0;
        default:
            return std::bit_cast<double>(random());
    }
}

std::vector<Frame> random_frames(const StreamInfo& stream, std::mt19937_64& random, std::size_t count) {
    std::vector<Frame> frames(count);
    std::int64_t time_ns = -5'000'000'000;
    for (Frame& frame : frames) {
        time_ns += static_cast<std::int64_t>(random() % 5'000'000'000);
        frame.time_ns = time_ns;
        for (std::size_t i = 0; i < kChannelCount; ++i) {
            const bool announced = ((stream.channels >> i) & 1U) != 0;
            if (announced && random() % 2 == 0) frame.set(static_cast<Channel>(i), any_number(random));
        }
    }
    return frames;
}

bool same_bits(double a, double b) {
    return std::bit_cast<std::uint64_t>(a) == std::bit_cast<std::uint64_t>(b) ||
           (std::isnan(a) && std::isnan(b));
}

TEST_CASE("frames written as CSV are read back to the bit") {
    const unsigned seed = GENERATE(1U, 20240229U, 77U);
    const Channel flap = GENERATE(Channel::flap_position, Channel::flap_angle);
    const std::string name = GENERATE(as<std::string>{}, "log.csv", "log.csv.gz", "log.csv.zst");
    INFO("seed " << seed << ", " << name);
    std::mt19937_64 random(seed);
    const StreamInfo stream = every_channel(flap);
    const std::vector<Frame> frames = random_frames(stream, random, 500);

    const TempFolder folder;
    const std::string path = folder / name;
    auto writer = CsvWriter::create(path, stream);
    REQUIRE(writer);
    for (const Frame& frame : frames) REQUIRE_FALSE(writer->write(frame));
    REQUIRE_FALSE(writer->finish());

    auto log = open_log(path, {});
    if (!log) FAIL(to_string(log.errors()));
    const WholeLog back = read_to_end(**log);
    REQUIRE_FALSE(back.error);
    CHECK(back.info.ride_height_names == stream.ride_height_names);
    CHECK(back.info.channels == stream.channels);
    CHECK(back.left_out.empty());
    REQUIRE(back.frames.size() == frames.size());
    for (std::size_t row = 0; row < frames.size(); ++row) {
        INFO("row " << row);
        REQUIRE(back.frames[row].time_ns == frames[row].time_ns);
        REQUIRE(back.frames[row].present == frames[row].present);
        for (std::size_t i = 0; i < kChannelCount; ++i) {
            if (!frames[row].has(static_cast<Channel>(i))) continue;
            INFO("channel " << i << ", " << number_text(frames[row].value[i]));
            REQUIRE(same_bits(back.frames[row].value[i], frames[row].value[i]));
        }
    }
}

TEST_CASE("numbers are written as short as they can be") {
    const TempFolder folder;
    const std::string path = folder / "log.csv";
    StreamInfo stream;
    stream.channels = std::uint64_t{1} << index(Channel::speed);
    auto writer = CsvWriter::create(path, stream);
    REQUIRE(writer);
    Frame frame;
    frame.time_ns = 2'500'000;
    frame.set(Channel::speed, 0.1);
    REQUIRE_FALSE(writer->write(frame));
    REQUIRE_FALSE(writer->finish());
    std::string text;
    std::getline(std::ifstream(path), text, '\0');
    CHECK(text == "t[s],speed[m/s]\n0.0025,0.1\n");
}

TEST_CASE("a frame with a channel that was not announced is an error, not a loss") {
    const TempFolder folder;
    auto writer = CsvWriter::create(folder / "log.csv", StreamInfo{});
    REQUIRE(writer);
    Frame frame;
    frame.set(Channel::lap, 1.0);
    const auto error = writer->write(frame);
    REQUIRE(error);
    CHECK_THAT(error->message, Catch::Contains("announce"));
}

}  // namespace
}  // namespace holdfast::session
