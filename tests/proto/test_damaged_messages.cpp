// SPDX-License-Identifier: MIT
// Any bytes may come in: no decoder may crash, read out of bounds or hang (the sanitizer build looks on), and
// what a block says about itself has to hold for what is delivered.
#include <catch2/catch.hpp>
#include <random>

#include "proto/codec.hpp"
#include "proto/result_codec.hpp"
#include "tests/proto/random_frames.hpp"

namespace holdfast::proto {
namespace {

using testing::named_stream;
using testing::random_frames;

std::size_t decode_with_all(std::string_view bytes) {
    static BlockDecoder decoder;
    Block block;
    std::size_t accepted = 0;
    if (!decoder.decode(bytes, block)) {
        ++accepted;
        if (block.frames.size() > kMaxBlockRows || block.info.ride_height_names.size() > kMaxRideHeights)
            throw std::logic_error("a block beyond its own bounds");
        for (const Frame& frame : block.frames)
            if ((frame.present & ~block.info.channels) != 0)
                throw std::logic_error("samples of a channel that the stream does not have");
    }
    accepted += static_cast<bool>(decode_end(bytes)) ? 1 : 0;
    accepted += static_cast<bool>(decode_estimate(bytes)) ? 1 : 0;
    accepted += static_cast<bool>(decode_closure(bytes)) ? 1 : 0;
    accepted += static_cast<bool>(decode_alarm(bytes)) ? 1 : 0;
    accepted += static_cast<bool>(decode_health(bytes)) ? 1 : 0;
    return accepted;
}

std::vector<std::string> sound_messages() {
    BlockEncoder encoder;
    const StreamInfo info = named_stream(3);
    HealthMessage health{
        .id = {1, 2}, .time_ns = 3, .ride_height_names = info.ride_height_names, .health = {}};
    return {std::string(encoder.encode({1, 2}, 3, info, random_frames(40, info, 11))),
            encode_end({{1, 2}, 3, false, "why"}),
            encode_estimate({{1, 2}, {}}),
            encode_closure({{1, 2}, {}}),
            encode_alarm({{1, 2}, {.channel = ride_height_channel(1), .shortfall_n = {}}, "ride_height_rear"}),
            encode_health(health)};
}

TEST_CASE("random bytes are refused without harm") {
    const std::uint32_t seed = 2024;
    INFO("seed " << seed);
    std::mt19937_64 random(seed);
    for (int round = 0; round < 20'000; ++round) {
        std::string bytes(random() % 200, '\0');
        for (char& byte : bytes) byte = static_cast<char>(random());
        REQUIRE_NOTHROW(decode_with_all(bytes));
    }
}

TEST_CASE("messages with bytes changed, cut, doubled or put in do no harm") {
    const std::uint32_t seed = 2025;
    INFO("seed " << seed);
    std::mt19937_64 random(seed);
    const std::vector<std::string> messages = sound_messages();
    std::size_t accepted = 0;
    for (int round = 0; round < 20'000; ++round) {
        std::string bytes = messages[random() % messages.size()];
        for (std::uint64_t changes = 1 + random() % 4; changes > 0 && !bytes.empty(); --changes) {
            const std::size_t at = random() % bytes.size();
            switch (random() % 4) {
                case 0:
                    bytes[at] = static_cast<char>(random());
                    break;
                case 1:
                    bytes.resize(at);
                    break;
                case 2:
                    bytes += bytes.substr(at);
                    break;
                default:
                    bytes.insert(at, 1, static_cast<char>(random()));
            }
        }
        REQUIRE_NOTHROW(accepted += decode_with_all(bytes));
    }
    CHECK(accepted > 0);  // the changes reach beyond the parser
}

TEST_CASE("every cut of a message is refused or still sound in itself") {
    for (const std::string& message : sound_messages())
        for (std::size_t size = 0; size < message.size(); ++size)
            REQUIRE_NOTHROW(decode_with_all(std::string_view(message).substr(0, size)));
}

TEST_CASE("a block that contradicts itself is refused with the reason") {
    // Written by hand after the Protobuf encoding: tag = field number << 3 | wire type, then length or value.
    const std::string id("\x0a\x00", 2);                // 1: Id, empty
    const std::string two_rows("\x1a\x02\x02\x02", 4);  // 3: time steps 1, 1
    const std::string value(8, '\0');
    const auto column = [](const std::string& inside) {  // 16: speed_mps
        return std::string("\x82\x01", 2) + static_cast<char>(inside.size()) + inside;
    };
    const std::string one_value = std::string("\x12\x08", 2) + value;
    const std::string row_2("\x0a\x01\x02", 3);
    const std::string rows_0_and_0("\x0a\x02\x00\x00", 4);
    const std::string two_values = std::string("\x12\x10", 2) + value + value;

    const auto why = [](const std::string& bytes) {
        BlockDecoder decoder;
        Block block;
        const auto error = decoder.decode(bytes, block);
        return error ? error->message : "";
    };
    CHECK(why(id + two_rows + column(two_values)).empty());
    CHECK_THAT(why(two_rows), Catch::Contains("no id"));
    CHECK_THAT(why(id + two_rows + column(one_value)), Catch::Contains("speed: 1 values for 2 rows"));
    CHECK_THAT(why(id + two_rows + column(row_2 + one_value)), Catch::Contains("row 2 of a block with 2"));
    CHECK_THAT(why(id + two_rows + column(row_2 + two_values)), Catch::Contains("2 values for 1 row steps"));
    CHECK_THAT(why(id + two_rows + column(rows_0_and_0 + two_values)), Catch::Contains("same row twice"));
    const std::string ride_height("\x2a\x03\x0a\x01h", 5);  // 5: RideHeight named h
    CHECK_THAT(why(id + ride_height + ride_height), Catch::Contains("\"h\" twice"));
}

TEST_CASE("a block of more rows than any sound one is refused before its frames are made") {
    std::string bytes("\x0a\x00\x1a", 3);  // id; 3: time steps, 65537 of one byte
    bytes += std::string("\x81\x80\x04", 3) + std::string(kMaxBlockRows + 1, '\x02');
    BlockDecoder decoder;
    Block block;
    const auto error = decoder.decode(bytes, block);
    REQUIRE(error);
    CHECK_THAT(error->message, Catch::Contains("65537 rows, at most 65536"));
    CHECK(block.frames.empty());
}

}  // namespace
}  // namespace holdfast::proto
