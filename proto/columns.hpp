// SPDX-License-Identifier: MIT
// The columns of a block beside the rows of the frames. Only for the codec: it shows generated types by name.
#pragma once

#include <optional>
#include <span>
#include <string>

#include "proto/vocabulary/frame.hpp"

namespace holdfast::wire {
class FrameBlock;
}

namespace holdfast::proto {

void frames_to_columns(const StreamInfo& info, std::span<const Frame> frames, wire::FrameBlock& block);

// The frames are there already, with their times. Fills their values and adds to info what the columns tell
// of the source. Set: which column is not sound, and why.
[[nodiscard]] std::optional<std::string> columns_to_frames(const wire::FrameBlock& block, StreamInfo& info,
                                                           std::span<Frame> frames);

}  // namespace holdfast::proto
