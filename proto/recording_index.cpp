// SPDX-License-Identifier: MIT
#include "proto/recording_index.hpp"

#include "holdfast.pb.h"

namespace holdfast::proto {

std::string encode_index(const std::vector<IndexEntry>& index) {
    wire::IndexMsg message;
    IndexEntry before;
    for (const IndexEntry& entry : index) {
        message.add_offset_step_bytes(entry.offset - before.offset);
        message.add_first_time_step_ns(
            static_cast<std::int64_t>(static_cast<std::uint64_t>(entry.first_time_ns) -
                                      static_cast<std::uint64_t>(before.first_time_ns)));
        before = entry;
    }
    return message.SerializeAsString();
}

std::optional<std::vector<IndexEntry>> decode_index(std::string_view bytes) {
    wire::IndexMsg message;
    if (!message.ParseFromArray(bytes.data(), static_cast<int>(bytes.size())) ||
        message.offset_step_bytes_size() != message.first_time_step_ns_size())
        return std::nullopt;
    std::vector<IndexEntry> index;
    index.reserve(static_cast<std::size_t>(message.offset_step_bytes_size()));
    std::uint64_t offset = 0;
    std::uint64_t time_ns = 0;
    for (int i = 0; i < message.offset_step_bytes_size(); ++i) {
        offset += message.offset_step_bytes(i);
        time_ns += static_cast<std::uint64_t>(message.first_time_step_ns(i));
        index.push_back({offset, static_cast<std::int64_t>(time_ns)});
    }
    return index;
}

std::string encode_recording_end(const RecordingEnd& end) {
    std::string bytes;
    append_u64(end.rows, bytes);
    append_u64(end.chunks, bytes);
    append_u64(end.index_offset, bytes);
    append_u64(end.complete ? 1 : 0, bytes);
    return bytes;
}

std::optional<RecordingEnd> decode_recording_end(std::string_view bytes) {
    if (bytes.size() != kRecordingEndBytes) return std::nullopt;
    return RecordingEnd{read_u64(bytes, 0), read_u64(bytes, 8), read_u64(bytes, 16),
                        read_u64(bytes, 24) == 1};
}

}  // namespace holdfast::proto
