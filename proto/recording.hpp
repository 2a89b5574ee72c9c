// SPDX-License-Identifier: MIT
// The native recording, `.hfr`: a stream of frames as compressed chunks, each with a checksum. A file that is
// cut anywhere reads to its last whole chunk; a damaged chunk is passed over and the next ones are read.
// Format: proto/README.md.
#pragma once

#include <cstdint>
#include <cstdio>
#include <memory>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "proto/chunk.hpp"
#include "proto/codec.hpp"
#include "proto/in_file.hpp"
#include "proto/recording_index.hpp"
#include "proto/result.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::proto {

// Whether a file that begins with these bytes is a recording; 8 are enough.
[[nodiscard]] bool is_recording(std::string_view first_bytes);

class RecordingWriter {
  public:
    // Replaces a file of that name. The same frames and info give the same bytes.
    [[nodiscard]] static Result<RecordingWriter> create(const std::string& path, const StreamInfo& info);

    // Frames reach the system after at most a second of source time: a killed process loses no more.
    // Set: the file could not be written, e.g. since the disk is full.
    [[nodiscard]] std::optional<Error> write(const Frame& frame);

    // Ends the file; without it a reader says that it was cut. complete = false: the frames' own source broke
    // off.
    [[nodiscard]] std::optional<Error> finish(bool complete);

  private:
    using Handle = std::unique_ptr<std::FILE, int (*)(std::FILE*)>;
    RecordingWriter(std::string path, Handle file, StreamInfo info);
    [[nodiscard]] std::optional<Error> write_pending();
    [[nodiscard]] std::optional<Error> put(ChunkKind kind, std::string_view payload);

    std::string path_;
    Handle file_;
    StreamInfo info_;
    std::vector<Frame> pending_;
    BlockEncoder encoder_;
    Packer packer_;
    std::string chunk_;
    std::vector<IndexEntry> index_;
    std::uint64_t offset_ = 0;
    std::uint64_t rows_ = 0;
};

// What a reader met that was not sound. All 0 in a whole file.
struct RecordingDamage {
    std::uint64_t places = 0;        // where reading had to look for the next sound chunk
    std::uint64_t bytes_passed = 0;  // over there
    std::uint64_t rows_lost = 0;     // frames known to be missing
};

class RecordingReader {
  public:
    // An error: the file cannot be read at all, or holds not one sound chunk of frames.
    [[nodiscard]] static Result<RecordingReader> open(const std::string& path);

    // Of the first sound chunk.
    [[nodiscard]] const StreamInfo& info() const { return info_; }

    // The next frame, or all that are left of the chunk it is in (good until the next call). False or empty:
    // the recording has ended.
    [[nodiscard]] bool next(Frame& frame);
    [[nodiscard]] std::span<const Frame> next_frames();

    // Set once reading has met damage or an end without its mark: what was delivered is right, but not all.
    // Tells the first place, and once the recording has ended what was lost in all. A seek begins it anew.
    [[nodiscard]] const std::optional<Error>& error() const { return error_; }
    [[nodiscard]] const RecordingDamage& damage() const { return damage_; }

    // Share of the file that has been read, 0 to 1.
    [[nodiscard]] double progress() const;

    // Go on with the first frame at or after this source time. False, and nothing changed, where the file has
    // no index to tell where that is (it was cut, or its times do not ascend).
    [[nodiscard]] bool seek(std::int64_t time_ns);

  private:
    explicit RecordingReader(InFile file) : file_(std::move(file)) {}
    [[nodiscard]] bool load_block();
    [[nodiscard]] std::optional<std::string> refuse_frames(std::string_view payload);
    void accept_end(std::string_view payload, std::uint64_t end_offset);
    void pass_over(std::uint64_t from, const std::string& why);
    void note(std::uint64_t offset, const std::string& why);
    void conclude();
    [[nodiscard]] std::optional<std::vector<IndexEntry>> read_index();

    InFile file_;
    StreamInfo info_;
    std::uint64_t position_ = 0;
    bool started_ = false;  // a block has been accepted: info_ is known
    bool ended_ = false;
    bool after_seek_ = false;  // the next block may be any
    Unpacker unpacker_;
    BlockDecoder decoder_;
    Block incoming_;
    Block block_;
    std::size_t next_row_ = 0;  // of block_
    std::uint64_t stream_id_ = 0;
    std::uint64_t next_sequence_ = 0;
    std::uint64_t rows_read_ = 0;
    RecordingDamage damage_;
    std::optional<Error> error_;
};

}  // namespace holdfast::proto
