// SPDX-License-Identifier: MIT
// A frame: the samples of one instant. The same plain struct on the car, on the wire's two ends and in the
// estimator.
#pragma once

#include <array>
#include <cstdint>
#include <string>
#include <string_view>
#include <vector>

#include "proto/vocabulary/channel.hpp"

namespace holdfast {

struct Frame {
    std::int64_t time_ns = 0;   // the source's time since its log or stream began
    std::uint64_t present = 0;  // bit index(channel): a new sample of that channel stands in value
    std::array<double, kChannelCount> value{};  // SI; may be non-finite: the reader counts, it does not judge

    [[nodiscard]] bool has(Channel c) const { return ((present >> index(c)) & 1U) != 0; }
    [[nodiscard]] double get(Channel c) const { return value[index(c)]; }
    void set(Channel c, double v) {
        value[index(c)] = v;
        present |= std::uint64_t{1} << index(c);
    }
    void erase(Channel c) { present &= ~(std::uint64_t{1} << index(c)); }
    [[nodiscard]] double time_s() const { return static_cast<double>(time_ns) * 1e-9; }
};
static_assert(kChannelCount <= 64, "Frame::present has a bit for each channel");

// What a source says once about its stream: slot i of the ride heights is called ride_height_<name i>.
struct StreamInfo {
    std::vector<std::string> ride_height_names;
    std::uint64_t channels = 0;  // bits as in Frame::present: channels that the source says it has
    std::string origin;          // human-readable: file name or node
};

inline constexpr std::string_view kRideHeightPrefix = "ride_height_";

// The channel as its stream calls it: "speed", or "ride_height_NAME" (the slot's number where it has no
// name).
[[nodiscard]] inline std::string channel_name(Channel channel,
                                              const std::vector<std::string>& ride_height_names) {
    if (!is_ride_height(channel)) return std::string(info(channel).name);
    const std::size_t slot = index(channel) - index(Channel::ride_height_0);
    return std::string(kRideHeightPrefix) +
           (slot < ride_height_names.size() ? ride_height_names[slot] : std::to_string(slot));
}

}  // namespace holdfast
