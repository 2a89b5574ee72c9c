// SPDX-License-Identifier: MIT
// Streams of any numbers there are, for what has to keep every bit.
#pragma once

#include <bit>
#include <catch2/catch.hpp>
#include <cmath>
#include <cstdint>
#include <limits>
#include <random>
#include <vector>

#include "proto/vocabulary/frame.hpp"

namespace holdfast::testing {

inline StreamInfo every_channel(Channel flap) {
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
inline double any_number(std::mt19937_64& random) {
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

inline std::vector<Frame> random_frames(const StreamInfo& stream, std::mt19937_64& random,
                                        std::size_t count) {
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

inline bool same_bits(double a, double b) {
    return std::bit_cast<std::uint64_t>(a) == std::bit_cast<std::uint64_t>(b) ||
           (std::isnan(a) && std::isnan(b));
}

inline void require_same(const std::vector<Frame>& got, const std::vector<Frame>& expected) {
    REQUIRE(got.size() == expected.size());
    for (std::size_t row = 0; row < expected.size(); ++row) {
        INFO("row " << row);
        REQUIRE(got[row].time_ns == expected[row].time_ns);
        REQUIRE(got[row].present == expected[row].present);
        for (std::size_t i = 0; i < kChannelCount; ++i) {
            if (!expected[row].has(static_cast<Channel>(i))) continue;
            INFO("channel " << i << ", got " << got[row].value[i] << ", expected " << expected[row].value[i]);
            REQUIRE(same_bits(got[row].value[i], expected[row].value[i]));
        }
    }
}

}  // namespace holdfast::testing
