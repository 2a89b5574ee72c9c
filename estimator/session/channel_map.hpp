// SPDX-License-Identifier: MIT
// Reading a log whose columns have other names: the [channels] table of a TOML file,
//   speed = { column = "GroundSpeed", unit = "km/h", scale = 1.0, offset = 0.0 }
// where the value in `unit` is scale * cell + offset. `unit` may be left out where the column's header has
// one.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <vector>

#include "estimator/session/error.hpp"
#include "estimator/session/units.hpp"

namespace holdfast::session {

struct MappedChannel {
    std::string channel;              // "t", a channel of the contract, or ride_height_NAME
    std::string column;               // header cell as a whole, or its name before the unit
    std::optional<std::string> unit;  // one that the channel accepts
    Linear to_unit;
    std::uint64_t line = 0;  // in the TOML file
};

struct ChannelMap {
    std::string file;
    std::vector<MappedChannel> channels;
};

// Every error of the file at once, each with key and line.
[[nodiscard]] Result<ChannelMap> read_channel_map(const std::string& path);

}  // namespace holdfast::session
