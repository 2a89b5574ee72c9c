// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <random>

#include "estimator/session/csv_writer.hpp"
#include "tests/session/random_frames.hpp"
#include "tests/session/small_log.hpp"

namespace holdfast::session {
namespace {

using namespace holdfast::testing;

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
    require_same(back.frames, frames);
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
