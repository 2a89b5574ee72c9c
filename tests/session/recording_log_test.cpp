// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <filesystem>
#include <sstream>

#include "estimator/session/csv_writer.hpp"
#include "proto/recording.hpp"
#include "tests/session/random_frames.hpp"
#include "tests/session/small_log.hpp"

namespace holdfast::session {
namespace {

using namespace holdfast::testing;
using Catch::Contains;

std::string content_of(const std::string& path) {
    std::ostringstream content;
    content << std::ifstream(path, std::ios::binary).rdbuf();
    return content.str();
}

void record(const std::string& path, const StreamInfo& stream, const std::vector<Frame>& frames,
            bool complete = true) {
    auto writer = proto::RecordingWriter::create(path, stream);
    REQUIRE(writer);
    for (const Frame& frame : frames) REQUIRE_FALSE(writer->write(frame));
    REQUIRE_FALSE(writer->finish(complete));
}

void write_csv(const std::string& path, const StreamInfo& stream, const std::vector<Frame>& frames) {
    auto writer = CsvWriter::create(path, stream);
    REQUIRE(writer);
    for (const Frame& frame : frames) REQUIRE_FALSE(writer->write(frame));
    REQUIRE_FALSE(writer->finish());
}

WholeLog read_file(const std::string& path, const LogOptions& options = {}) {
    auto log = open_log(path, options);
    if (!log) FAIL(to_string(log.errors()));
    return read_to_end(**log);
}

TEST_CASE("CSV to recording to CSV to recording loses nothing") {
    const unsigned seed = 40711;
    INFO("seed " << seed);
    std::mt19937_64 random(seed);
    const StreamInfo stream = every_channel(GENERATE(Channel::flap_position, Channel::flap_angle));
    const std::vector<Frame> frames = random_frames(stream, random, 300);
    const TempFolder folder;
    const std::string csv[] = {folder / "first.csv", folder / "second.csv"};
    const std::string recording[] = {folder / "first.hfr", folder / "second.hfr"};

    write_csv(csv[0], stream, frames);
    for (int turn = 0; turn < 2; ++turn) {
        const WholeLog from_csv = read_file(csv[turn]);
        REQUIRE_FALSE(from_csv.error);
        record(recording[turn], from_csv.info, from_csv.frames);
        const WholeLog from_recording = read_file(recording[turn]);
        REQUIRE_FALSE(from_recording.error);
        CHECK(from_recording.info.channels == stream.channels);
        CHECK(from_recording.info.ride_height_names == stream.ride_height_names);
        CHECK(from_recording.info.origin == recording[turn]);
        require_same(from_recording.frames, frames);
        if (turn == 0) write_csv(csv[1], from_recording.info, from_recording.frames);
    }
    CHECK(content_of(csv[0]) == content_of(csv[1]));
}

// One second of speed at 100 Hz.
std::vector<Frame> some_frames() {
    std::vector<Frame> frames(100);
    for (std::size_t i = 0; i < frames.size(); ++i) {
        frames[i].time_ns = static_cast<std::int64_t>(i) * 10'000'000;
        frames[i].set(Channel::speed, 50.0 + static_cast<double>(i));
    }
    return frames;
}

StreamInfo speed_only() {
    StreamInfo stream;
    stream.channels = std::uint64_t{1} << index(Channel::speed);
    return stream;
}

TEST_CASE("a recording is known by its content, whatever its name") {
    const TempFolder folder;
    const std::string path = folder / "log.csv";
    record(path, speed_only(), some_frames());
    const WholeLog log = read_file(path);
    CHECK_FALSE(log.error);
    require_same(log.frames, some_frames());
}

TEST_CASE("a recording that was cut yields its beginning and an error that names it") {
    const TempFolder folder;
    const std::string path = folder / "log.hfr";
    std::vector<Frame> frames = some_frames();
    for (int copy = 1; copy < 5; ++copy) {
        for (Frame frame : some_frames()) {
            frame.time_ns += copy * 1'000'000'000LL;
            frames.push_back(frame);
        }
    }
    record(path, speed_only(), frames);
    std::filesystem::resize_file(path, std::filesystem::file_size(path) * 2 / 3);
    const WholeLog log = read_file(path);
    CHECK_FALSE(log.frames.empty());
    CHECK(log.frames.size() < frames.size());
    require_same(log.frames,
                 {frames.begin(), frames.begin() + static_cast<std::ptrdiff_t>(log.frames.size())});
    REQUIRE(log.error);
    CHECK(log.error->file == path);
    CHECK_THAT(log.error->message, Contains("byte "));
}

TEST_CASE("a recording of a log that broke is incomplete as well") {
    const TempFolder folder;
    record(folder / "log.hfr", speed_only(), some_frames(), false);
    const WholeLog log = read_file(folder / "log.hfr");
    require_same(log.frames, some_frames());
    CHECK(log.error);
}

TEST_CASE("a recording of which nothing is left cannot be opened") {
    const TempFolder folder;
    const std::string path = folder / "log.hfr";
    record(path, speed_only(), some_frames());
    std::filesystem::resize_file(path, 20);
    const auto log = open_log(path, {});
    REQUIRE_FALSE(log);
    CHECK(log.errors().at(0).file == path);
}

TEST_CASE("strict holds for recordings too") {
    const TempFolder folder;
    LogOptions strict;
    strict.strict = true;
    std::vector<Frame> frames = some_frames();
    const auto error_after = [&](std::size_t good) {
        record(folder / "log.hfr", speed_only(), frames);
        CHECK(read_file(folder / "log.hfr").frames.size() == frames.size());
        const WholeLog log = read_file(folder / "log.hfr", strict);
        CHECK(log.frames.size() == good);
        REQUIRE(log.error);
        return log.error->message;
    };
    frames[7].set(Channel::speed, std::numeric_limits<double>::quiet_NaN());
    CHECK_THAT(error_after(7), Contains("speed is nan") && Contains("at 0.07 s") && Contains("--strict"));
    frames[5].time_ns = frames[4].time_ns;
    CHECK_THAT(error_after(5), Contains("at 0.04 s") && Contains("--strict"));
}

TEST_CASE("a channel map is for CSV logs only") {
    const TempFolder folder;
    record(folder / "log.hfr", speed_only(), some_frames());
    LogOptions mapped;
    mapped.channels.file = "map.toml";
    mapped.channels.channels.push_back(
        {.channel = "speed", .column = "v", .unit = {}, .to_unit = {}, .line = 2});
    const auto log = open_log(folder / "log.hfr", mapped);
    REQUIRE_FALSE(log);
    CHECK_THAT(log.errors().at(0).message, Contains("is a recording") && Contains("expected a CSV log"));
}

}  // namespace
}  // namespace holdfast::session
