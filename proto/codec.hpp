// SPDX-License-Identifier: MIT
// Frames to bytes and back: the one place, with result_codec, where Protobuf types meet plain structs.
// Decoding takes any bytes: what is no sound message is an error, never a crash, and nothing of it is
// delivered. Schema: holdfast.proto.
#pragma once

#include <cstdint>
#include <memory>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "proto/result.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::proto {

// No sound block has more rows: bounds what a hostile message can make us allocate (16 MiB of frames).
inline constexpr std::size_t kMaxBlockRows = 65536;
// Longest encoded message that is decoded: a full block of every channel fits, at 8 bytes a value and 1 a row
// step.
inline constexpr std::size_t kMaxMessageBytes = 32U << 20U;

struct MessageId {
    std::uint64_t stream_id = 0;
    std::uint64_t sequence = 0;
    bool operator==(const MessageId&) const = default;
};

// Random, never 0.
[[nodiscard]] std::uint64_t draw_stream_id();

struct Block {
    MessageId id;
    std::uint64_t rows_before = 0;  // rows in all earlier blocks of the stream
    StreamInfo info;            // channels: those of the source's StreamInfo and those that have samples here
    std::vector<Frame> frames;  // none: the block only tells of the source
};

struct End {
    MessageId id;            // sequence: of the block that would have come next
    std::uint64_t rows = 0;  // of the whole stream
    bool complete = true;
    std::string reason;  // why it is not complete
};

// Keeps its buffers from block to block.
class BlockEncoder {
  public:
    BlockEncoder();
    ~BlockEncoder();
    BlockEncoder(BlockEncoder&&) noexcept;
    BlockEncoder& operator=(BlockEncoder&&) noexcept;

    // At most kMaxBlockRows frames and kMaxRideHeights names, else std::length_error: a fault of the caller.
    // Doubles travel bit by bit; times may be any. Samples of a ride height that info does not name are left
    // out. The bytes are good until the next call.
    [[nodiscard]] std::string_view encode(const MessageId& id, std::uint64_t rows_before,
                                          const StreamInfo& info, std::span<const Frame> frames);

  private:
    struct Memory;
    std::unique_ptr<Memory> memory_;
};

// Keeps its buffers from block to block.
class BlockDecoder {
  public:
    BlockDecoder();
    ~BlockDecoder();
    BlockDecoder(BlockDecoder&&) noexcept;
    BlockDecoder& operator=(BlockDecoder&&) noexcept;

    // Set: why the bytes are no block; `into` then holds nothing that may be used.
    [[nodiscard]] std::optional<Error> decode(std::string_view bytes, Block& into);

  private:
    struct Memory;
    std::unique_ptr<Memory> memory_;
};

[[nodiscard]] std::string encode_end(const End& end);
[[nodiscard]] Result<End> decode_end(std::string_view bytes);

}  // namespace holdfast::proto
