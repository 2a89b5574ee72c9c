// SPDX-License-Identifier: MIT
// Frames and names from a seed, and their comparison bit by bit.
#pragma once

#include <bit>
#include <cstdint>
#include <limits>
#include <random>
#include <string>
#include <vector>

#include "proto/vocabulary/frame.hpp"

namespace holdfast::testing {

inline StreamInfo named_stream(std::size_t ride_heights) {
    StreamInfo info;
    info.origin = "random frames";
    for (std::size_t slot = 0; slot < ride_heights; ++slot) {
        info.ride_height_names.push_back("place_" + std::to_string(slot));
        info.channels |= std::uint64_t{1} << index(ride_height_channel(slot));
    }
    info.channels |= (std::uint64_t{1} << index(Channel::ride_height_0)) - 1;
    return info;
}

// Each channel has a sample with its own probability, in places 0 or 1; values of every kind of double.
inline std::vector<Frame> random_frames(std::size_t count, const StreamInfo& info, std::uint32_t seed) {
    std::mt19937_64 random(seed);
    std::uniform_real_distribution<double> share(-0.3, 1.3);
    std::vector<double> probability;
    for (std::size_t c = 0; c < kChannelCount; ++c) probability.push_back(share(random));

    std::vector<Frame> frames(count);
    std::int64_t time_ns = 0;
    for (Frame& frame : frames) {
        time_ns += static_cast<std::int64_t>(random() % 5'000'000);
        frame.time_ns = time_ns;
        for (std::size_t c = 0; c < kChannelCount; ++c) {
            const bool named = (info.channels >> c & 1U) != 0;
            if (!named || share(random) > probability[c]) continue;
            const std::uint64_t kind = random() % 20;
            const double value = kind == 0   ? std::numeric_limits<double>::quiet_NaN()
                                 : kind == 1 ? -std::numeric_limits<double>::infinity()
                                 : kind == 2 ? -0.0
                                 : kind == 3 ? std::bit_cast<double>(random())
                                             : share(random) * 1e4;
            frame.set(static_cast<Channel>(c), value);
        }
    }
    return frames;
}

inline bool same_bits(const Frame& a, const Frame& b) {
    if (a.time_ns != b.time_ns || a.present != b.present) return false;
    for (std::size_t c = 0; c < kChannelCount; ++c)
        if (a.has(static_cast<Channel>(c)) &&
            std::bit_cast<std::uint64_t>(a.value[c]) != std::bit_cast<std::uint64_t>(b.value[c]))
            return false;
    return true;
}

inline bool same_bits(const std::vector<Frame>& a, const std::vector<Frame>& b) {
    if (a.size() != b.size()) return false;
    for (std::size_t i = 0; i < a.size(); ++i)
        if (!same_bits(a[i], b[i])) return false;
    return true;
}

}  // namespace holdfast::testing
