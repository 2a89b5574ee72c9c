// SPDX-License-Identifier: MIT
// The units that a log may use, channel by channel, and their way to SI. Factors: NIST SP 811 appendix B
// (lbf, kgf, psi, conventional inHg, ft, in, mph), ISO 80000-3 (kn).
#pragma once

#include <optional>
#include <span>
#include <string>
#include <string_view>

#include "proto/vocabulary/frame.hpp"

namespace holdfast::session {

inline constexpr std::string_view kTimeName = "t";

// value in SI = scale * value in the unit + offset. -0.0 is the neutral offset: it keeps the sign of a zero.
struct Linear {
    double scale = 1.0;
    double offset = -0.0;

    [[nodiscard]] constexpr double operator()(double value) const { return value * scale + offset; }
};

// First `inner`, then `outer`.
[[nodiscard]] constexpr Linear compose(const Linear& inner, const Linear& outer) {
    return {inner.scale * outer.scale, inner.offset * outer.scale + outer.offset};
}

struct Unit {
    std::string_view name;
    Linear to_si;
};

// Units of a channel, the SI unit among them.
[[nodiscard]] std::span<const Unit> units_of(Channel channel);

// How a column of this channel name (not "t") and this unit is read.
struct ChannelUnit {
    Channel channel =
        Channel::speed;  // ride_height_0 for every ride_height_NAME: the reader gives out the slots
    Linear to_si;
};
[[nodiscard]] std::optional<ChannelUnit> find_unit(std::string_view channel_name, std::string_view unit);

// Power of ten from the unit of "t" (s, ms, us, ns) to nanoseconds.
[[nodiscard]] std::optional<int> time_exponent(std::string_view unit);

// True for "t", every channel of the vocabulary that a log may name, and ride_height_NAME.
[[nodiscard]] bool is_channel_name(std::string_view name);

// "m/s, km/h, mph, kn"
[[nodiscard]] std::string accepted_units(std::string_view channel_name);

}  // namespace holdfast::session
