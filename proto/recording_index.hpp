// SPDX-License-Identifier: MIT
// The last two chunks of a recording: the index, which is optional, and the end.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "proto/chunk.hpp"

namespace holdfast::proto {

struct IndexEntry {
    std::uint64_t offset = 0;  // of a chunk of frames
    std::int64_t first_time_ns = 0;
};

[[nodiscard]] std::string encode_index(const std::vector<IndexEntry>& index);
// Nothing: no sound index.
[[nodiscard]] std::optional<std::vector<IndexEntry>> decode_index(std::string_view bytes);

// Of fixed size, so that it is found from the end of the file: four u64, little endian.
struct RecordingEnd {
    std::uint64_t rows = 0;
    std::uint64_t chunks = 0;        // of frames
    std::uint64_t index_offset = 0;  // of the index's chunk; 0: there is none
    bool complete = true;            // false: what was recorded broke off before its end
};
inline constexpr std::size_t kRecordingEndBytes = 32;

[[nodiscard]] std::string encode_recording_end(const RecordingEnd& end);
[[nodiscard]] std::optional<RecordingEnd> decode_recording_end(std::string_view bytes);

}  // namespace holdfast::proto
