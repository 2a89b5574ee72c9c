// SPDX-License-Identifier: MIT
// What the header line of a CSV log says: which cell is which channel, and its way to SI.
#pragma once

#include <cstddef>
#include <cstdint>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "estimator/session/channel_map.hpp"
#include "estimator/session/error.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::session {

struct CsvColumn {
    std::size_t cell = 0;  // counted from 0
    Channel channel = Channel::speed;
    Linear to_si;
};

struct CsvLayout {
    std::vector<std::string> header;  // the header's cells, for messages
    std::size_t time_cell = 0;
    int time_exponent = 9;     // from the unit of t to nanoseconds
    bool time_mapped = false;  // the channel map scales or shifts t
    Linear time_to_unit;
    std::vector<CsvColumn> columns;  // in the file's order, t left out
    std::vector<std::string> left_out;
    StreamInfo info;
};

// `line` is where the header stands in `file`. Every error of the header at once.
[[nodiscard]] Result<CsvLayout> read_csv_layout(const std::string& file, std::uint64_t line,
                                                std::span<const std::string_view> header,
                                                const ChannelMap& map);

}  // namespace holdfast::session
