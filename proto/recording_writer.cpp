// SPDX-License-Identifier: MIT
#include <cerrno>
#include <cstring>

#include "proto/recording.hpp"

namespace holdfast::proto {
namespace {

constexpr std::size_t kRowsPerChunk = 4096;
constexpr std::int64_t kChunkSpan_ns = 1'000'000'000;

// A recording is one stream; a fixed id lets the same input give the same bytes.
constexpr std::uint64_t kRecordingStreamId = 1;

}  // namespace

Result<RecordingWriter> RecordingWriter::create(const std::string& path, const StreamInfo& info) {
    Handle file(std::fopen(path.c_str(), "wb"), std::fclose);
    if (!file) return Error{path, 0, std::string("cannot be written: ") + std::strerror(errno)};
    return RecordingWriter(path, std::move(file), info);
}

RecordingWriter::RecordingWriter(std::string path, Handle file, StreamInfo info)
    : path_(std::move(path)), file_(std::move(file)), info_(std::move(info)) {}

std::optional<Error> RecordingWriter::write(const Frame& frame) {
    // A span below zero: time ran backwards; wrapping keeps far times from overflowing.
    const std::uint64_t span_ns = pending_.empty() ? 0
                                                   : static_cast<std::uint64_t>(frame.time_ns) -
                                                         static_cast<std::uint64_t>(pending_.front().time_ns);
    if (pending_.size() >= kRowsPerChunk || span_ns >= static_cast<std::uint64_t>(kChunkSpan_ns))
        if (auto error = write_pending()) return error;
    pending_.push_back(frame);
    return std::nullopt;
}

std::optional<Error> RecordingWriter::finish(bool complete) {
    // Without a single frame, an empty block still tells of the source.
    if (!pending_.empty() || index_.empty())
        if (auto error = write_pending()) return error;
    const RecordingEnd end{
        .rows = rows_, .chunks = index_.size(), .index_offset = offset_, .complete = complete};
    if (auto error = put(ChunkKind::index, packer_.pack(encode_index(index_)))) return error;
    if (auto error = put(ChunkKind::end, encode_recording_end(end))) return error;
    if (std::fclose(file_.release()) != 0)
        return Error{path_, offset_, std::string("cannot be closed: ") + std::strerror(errno)};
    return std::nullopt;
}

std::optional<Error> RecordingWriter::write_pending() {
    const MessageId id{.stream_id = kRecordingStreamId, .sequence = index_.size()};
    const std::string_view block = encoder_.encode(id, rows_, info_, pending_);
    index_.push_back({offset_, pending_.empty() ? 0 : pending_.front().time_ns});
    rows_ += pending_.size();
    pending_.clear();
    return put(ChunkKind::frames, packer_.pack(block));
}

std::optional<Error> RecordingWriter::put(ChunkKind kind, std::string_view payload) {
    chunk_.clear();
    append_chunk(kind, payload, chunk_);
    if (std::fwrite(chunk_.data(), 1, chunk_.size(), file_.get()) != chunk_.size() ||
        std::fflush(file_.get()) != 0)
        return Error{path_, offset_, std::string("cannot be written: ") + std::strerror(errno)};
    offset_ += chunk_.size();
    return std::nullopt;
}

}  // namespace holdfast::proto
