// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <limits>
#include <set>

#include "proto/codec.hpp"
#include "tests/proto/random_frames.hpp"

namespace holdfast::proto {
namespace {

using testing::named_stream;
using testing::random_frames;
using testing::same_bits;

TEST_CASE("frames come back bit by bit, with the names of their ride heights") {
    const std::uint32_t seed = GENERATE(1U, 2U, 3U, 4U, 5U, 6U, 7U, 8U);
    INFO("seed " << seed);
    const std::size_t count = seed * seed * 7;
    const StreamInfo info = named_stream(seed % (kMaxRideHeights + 1));
    const std::vector<Frame> frames = random_frames(count, info, seed);

    BlockEncoder encoder;
    BlockDecoder decoder;
    Block block;
    const std::string bytes(encoder.encode({.stream_id = 77, .sequence = seed}, 1000, info, frames));
    const auto error = decoder.decode(bytes, block);
    INFO((error ? error->message : ""));
    REQUIRE_FALSE(error);
    CHECK(block.id == MessageId{.stream_id = 77, .sequence = seed});
    CHECK(block.rows_before == 1000);
    CHECK(block.info.ride_height_names == info.ride_height_names);
    CHECK(block.info.channels == info.channels);
    CHECK(block.info.origin == info.origin);
    CHECK(same_bits(block.frames, frames));
}

TEST_CASE("an encoder and a decoder carry nothing over from one block to the next") {
    const StreamInfo rich = named_stream(3);
    const StreamInfo poor{.ride_height_names = {"front"}, .channels = 0, .origin = {}};
    Frame frame;
    frame.time_ns = 5;
    frame.set(Channel::speed, 61.5);

    BlockEncoder encoder;
    BlockDecoder decoder;
    Block block;
    REQUIRE_FALSE(decoder.decode(encoder.encode({1, 0}, 0, rich, random_frames(50, rich, 1)), block));
    REQUIRE_FALSE(decoder.decode(encoder.encode({1, 1}, 50, poor, std::vector{frame}), block));
    CHECK(block.info.ride_height_names == poor.ride_height_names);
    CHECK(block.info.channels == std::uint64_t{1} << index(Channel::speed));
    CHECK(block.info.origin.empty());
    CHECK(same_bits(block.frames, {frame}));
}

TEST_CASE("times at the ends of their range come back") {
    std::vector<Frame> frames(4);
    frames[0].time_ns = std::numeric_limits<std::int64_t>::max();
    frames[1].time_ns = std::numeric_limits<std::int64_t>::min();
    frames[2].time_ns = -1;
    frames[3].time_ns = std::numeric_limits<std::int64_t>::max();
    BlockEncoder encoder;
    BlockDecoder decoder;
    Block block;
    REQUIRE_FALSE(decoder.decode(encoder.encode({1, 0}, 0, {}, frames), block));
    CHECK(same_bits(block.frames, frames));
}

TEST_CASE("a channel that the source does not have costs no byte") {
    Frame frame;
    frame.set(Channel::speed, 61.5);
    StreamInfo with_speed;
    with_speed.channels = std::uint64_t{1} << index(Channel::speed);
    StreamInfo with_lap = with_speed;
    with_lap.channels |= std::uint64_t{1} << index(Channel::lap);
    BlockEncoder encoder;
    const std::size_t without = encoder.encode({1, 0}, 0, with_speed, std::vector{frame}).size();
    const std::size_t with = encoder.encode({1, 0}, 0, with_lap, std::vector{frame}).size();
    CHECK(with == without + 3);  // Protobuf: two bytes of tag, one of length
}

TEST_CASE("names that are not UTF-8 come back as they are") {
    const StreamInfo info{.ride_height_names = {"h\xff"}, .channels = 0, .origin = "\xc3\x28.csv"};
    BlockEncoder encoder;
    BlockDecoder decoder;
    Block block;
    REQUIRE_FALSE(decoder.decode(encoder.encode({1, 0}, 0, info, {}), block));
    CHECK(block.info.ride_height_names == info.ride_height_names);
    CHECK(block.info.origin == info.origin);
}

TEST_CASE("the end of a stream comes back") {
    const End end{.id = {.stream_id = ~0ULL, .sequence = 12}, .rows = 99, .complete = false, .reason = "cut"};
    const Result<End> back = decode_end(encode_end(end));
    REQUIRE(back);
    CHECK(back->id == end.id);
    CHECK(back->rows == 99);
    CHECK_FALSE(back->complete);
    CHECK(back->reason == "cut");
}

TEST_CASE("stream ids differ from start to start and are never 0") {
    std::set<std::uint64_t> drawn;
    for (int i = 0; i < 100; ++i) drawn.insert(draw_stream_id());
    CHECK(drawn.size() == 100);
    CHECK_FALSE(drawn.contains(0));
}

TEST_CASE("a caller that asks for more than the format carries is told so") {
    BlockEncoder encoder;
    CHECK_THROWS_AS(encoder.encode({}, 0, {}, std::vector<Frame>(kMaxBlockRows + 1)), std::length_error);
    StreamInfo many;
    many.ride_height_names.resize(kMaxRideHeights + 1);
    CHECK_THROWS_AS(encoder.encode({}, 0, many, {}), std::length_error);
}

}  // namespace
}  // namespace holdfast::proto
