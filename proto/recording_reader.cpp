// SPDX-License-Identifier: MIT
#include <algorithm>
#include <utility>

#include "proto/recording.hpp"

namespace holdfast::proto {

bool is_recording(std::string_view first_bytes) {
    return first_bytes.starts_with(kChunkMarker);
}

Result<RecordingReader> RecordingReader::open(const std::string& path) {
    Result<InFile> file = InFile::open(path);
    if (!file) return file.error();
    RecordingReader reader(std::move(*file));
    if (!reader.load_block() && !reader.started_) {
        const std::string why = reader.file_.failure() ? *reader.file_.failure()
                                : reader.file_.size() == 0
                                    ? "is empty; a recording was expected"
                                    : "is no recording, or one without a single sound chunk of frames";
        return Error{path, 0, why};
    }
    return reader;
}

bool RecordingReader::next(Frame& frame) {
    while (next_row_ == block_.frames.size())
        if (!load_block()) return false;
    frame = block_.frames[next_row_++];
    return true;
}

std::span<const Frame> RecordingReader::next_frames() {
    while (next_row_ == block_.frames.size())
        if (!load_block()) return {};
    return std::span(block_.frames).subspan(std::exchange(next_row_, block_.frames.size()));
}

double RecordingReader::progress() const {
    return file_.size() == 0 ? 0.0 : static_cast<double>(position_) / static_cast<double>(file_.size());
}

// Reads on to the next sound block of frames.
bool RecordingReader::load_block() {
    while (!ended_) {
        const std::uint64_t begin = position_;
        const std::string_view head = file_.view(begin, kChunkHeaderBytes);
        if (head.empty()) {
            note(begin,
                 file_.failure().value_or("the file ends without its end mark: it was cut, or its writer was "
                                          "killed"));
            conclude();
            return false;
        }
        const std::optional<ChunkHeader> header = read_chunk_header(head);
        if (!header) {
            pass_over(begin + 1, "no sound chunk begins here");
            continue;
        }
        const std::string_view payload = file_.view(begin + kChunkHeaderBytes, header->payload_bytes);
        if (!is_sound(*header, payload)) {
            pass_over(begin + kChunkHeaderBytes, payload.size() < header->payload_bytes
                                                     ? "the chunk is cut"
                                                     : "the chunk's checksum is wrong");
            continue;
        }
        const std::uint64_t end = begin + kChunkHeaderBytes + payload.size();
        bool loaded = false;
        if (header->kind == static_cast<std::uint32_t>(ChunkKind::end)) {
            accept_end(payload, end);
        } else if (header->kind == static_cast<std::uint32_t>(ChunkKind::frames)) {
            const std::optional<std::string> why = refuse_frames(payload);
            loaded = !why;
            if (why) {
                ++damage_.places;
                damage_.bytes_passed += end - begin;
                note(begin, *why);
            }
        }  // The index is read when it is needed; kinds of a newer program are passed over.
        position_ = end;
        if (loaded) return true;
    }
    return false;
}

// Set: why the payload is not this recording's next frames. Else it has become the current block.
std::optional<std::string> RecordingReader::refuse_frames(std::string_view payload) {
    const std::optional<std::string_view> bytes = unpacker_.unpack(payload);
    if (!bytes) return "the chunk does not unpack";
    if (auto error = decoder_.decode(*bytes, incoming_)) return error->message;
    if (started_ &&
        (incoming_.id.stream_id != stream_id_ || incoming_.info.ride_height_names != info_.ride_height_names))
        return "the chunk belongs to another recording";
    if (!after_seek_ && incoming_.id.sequence < next_sequence_) return "the chunk has been there before";
    if (!after_seek_ && incoming_.rows_before > rows_read_) {
        damage_.rows_lost += incoming_.rows_before - rows_read_;
        note(position_, "chunks are missing before this place");
    }
    after_seek_ = false;
    std::swap(block_, incoming_);
    if (!std::exchange(started_, true)) {
        info_ = block_.info;
        stream_id_ = block_.id.stream_id;
    }
    next_row_ = 0;
    next_sequence_ = block_.id.sequence + 1;
    rows_read_ = block_.rows_before + block_.frames.size();
    return std::nullopt;
}

void RecordingReader::accept_end(std::string_view payload, std::uint64_t end_offset) {
    const std::optional<RecordingEnd> end = decode_recording_end(payload);
    if (!end) note(end_offset, "the end mark is of another length than expected");
    if (end && end->rows > rows_read_) {
        damage_.rows_lost += end->rows - rows_read_;
        note(end_offset, "chunks are missing before this place");
    }
    if (end && !end->complete) note(end_offset, "what was recorded here broke off before its own end");
    if (end_offset < file_.size())
        note(end_offset,
             std::to_string(file_.size() - end_offset) + " bytes after the end mark, none expected");
    conclude();
}

// Goes to the next sound header at or after `from`, or to the file's end.
void RecordingReader::pass_over(std::uint64_t from, const std::string& why) {
    const std::uint64_t begin = position_;
    ++damage_.places;
    note(begin, why);
    constexpr std::size_t kWindowBytes = 64U << 10U;
    position_ = file_.size();
    while (from < file_.size()) {
        const std::string_view window = file_.view(from, kWindowBytes);
        if (window.size() < kChunkHeaderBytes) break;
        const std::size_t found = window.find(kChunkMarker);
        if (found == std::string_view::npos) {
            from += window.size() - (kChunkMarker.size() - 1);
        } else if (read_chunk_header(file_.view(from + found, kChunkHeaderBytes))) {
            position_ = from + found;
            break;
        } else {
            from += found + 1;
        }
    }
    damage_.bytes_passed += position_ - begin;
}

// The first thing that was wrong is what a person has to know; the rest is counted.
void RecordingReader::note(std::uint64_t offset, const std::string& why) {
    if (!error_) error_ = Error{file_.path(), offset, why};
}

void RecordingReader::conclude() {
    ended_ = true;
    if (error_ && damage_.places + damage_.rows_lost > 0)
        error_->message += " (in all " + std::to_string(damage_.places) + " damaged places, " +
                           std::to_string(damage_.bytes_passed) + " bytes passed over, " +
                           std::to_string(damage_.rows_lost) + " frames known to be lost)";
}

std::optional<std::vector<IndexEntry>> RecordingReader::read_index() {
    constexpr std::uint64_t kTailBytes = kChunkHeaderBytes + kRecordingEndBytes;
    if (file_.size() < kTailBytes) return std::nullopt;
    const std::string_view tail = file_.view(file_.size() - kTailBytes, kTailBytes);
    const auto tail_header = read_chunk_header(tail);
    if (!tail_header || tail_header->kind != static_cast<std::uint32_t>(ChunkKind::end) ||
        !is_sound(*tail_header, tail.substr(kChunkHeaderBytes)))
        return std::nullopt;
    const auto end = decode_recording_end(tail.substr(kChunkHeaderBytes));
    if (!end || end->index_offset == 0) return std::nullopt;

    const auto header = read_chunk_header(file_.view(end->index_offset, kChunkHeaderBytes));
    if (!header || header->kind != static_cast<std::uint32_t>(ChunkKind::index)) return std::nullopt;
    const std::string_view payload = file_.view(end->index_offset + kChunkHeaderBytes, header->payload_bytes);
    if (!is_sound(*header, payload)) return std::nullopt;
    const auto bytes = unpacker_.unpack(payload);
    if (!bytes) return std::nullopt;
    auto index = decode_index(*bytes);
    const auto earlier = [](const IndexEntry& a, const IndexEntry& b) {
        return a.first_time_ns < b.first_time_ns;
    };
    if (!index || index->empty() || !std::is_sorted(index->begin(), index->end(), earlier))
        return std::nullopt;
    return index;
}

bool RecordingReader::seek(std::int64_t time_ns) {
    const auto index = read_index();
    if (!index) return false;
    // The last chunk that begins before `time_ns`: one that begins at it may be preceded by equal times.
    const auto later =
        std::lower_bound(index->begin(), index->end(), time_ns,
                         [](const IndexEntry& entry, std::int64_t t) { return entry.first_time_ns < t; });
    position_ = (later == index->begin() ? later : std::prev(later))->offset;
    ended_ = false;
    error_.reset();
    damage_ = {};
    after_seek_ = true;
    block_.frames.clear();
    next_row_ = 0;
    while (load_block()) {
        const auto found = std::find_if(block_.frames.begin(), block_.frames.end(),
                                        [&](const Frame& frame) { return frame.time_ns >= time_ns; });
        next_row_ = static_cast<std::size_t>(found - block_.frames.begin());
        if (found != block_.frames.end()) break;
    }
    return true;
}

}  // namespace holdfast::proto
