// SPDX-License-Identifier: MIT
#include "proto/codec.hpp"

#include <google/protobuf/arena.h>

#include <random>
#include <stdexcept>

#include "holdfast.pb.h"
#include "proto/columns.hpp"

namespace holdfast::proto {
namespace {

// One message at a time lies in an arena whose first block stays: a block of a second of running needs no
// more.
struct MessageArena {
    static constexpr std::size_t kFirstBlockBytes = 512U << 10U;

    wire::FrameBlock& fresh() {
        arena.Reset();
        return *google::protobuf::Arena::CreateMessage<wire::FrameBlock>(&arena);
    }

    std::unique_ptr<char[]> first_block = std::make_unique<char[]>(kFirstBlockBytes);
    google::protobuf::Arena arena{first_block.get(), kFirstBlockBytes};
};

void put_id(const MessageId& id, wire::Id& into) {
    into.set_stream_id(id.stream_id);
    into.set_sequence(id.sequence);
}

MessageId get_id(const wire::Id& from) {
    return {from.stream_id(), from.sequence()};
}

// Steps wrap around, so that any pair of times, however far apart, comes back.
std::int64_t difference(std::int64_t a, std::int64_t b) {
    return static_cast<std::int64_t>(static_cast<std::uint64_t>(a) - static_cast<std::uint64_t>(b));
}
std::int64_t sum(std::int64_t a, std::int64_t b) {
    return static_cast<std::int64_t>(static_cast<std::uint64_t>(a) + static_cast<std::uint64_t>(b));
}

Error no_block(const std::string& why) {
    return {.message = "no sound block of frames: " + why};
}

}  // namespace

std::uint64_t draw_stream_id() {
    std::random_device device;
    std::uniform_int_distribution<std::uint64_t> any(1);
    return any(device);
}

struct BlockEncoder::Memory : MessageArena {
    std::string bytes;
};

BlockEncoder::BlockEncoder() : memory_(std::make_unique<Memory>()) {}
BlockEncoder::~BlockEncoder() = default;
BlockEncoder::BlockEncoder(BlockEncoder&&) noexcept = default;
BlockEncoder& BlockEncoder::operator=(BlockEncoder&&) noexcept = default;

std::string_view BlockEncoder::encode(const MessageId& id, std::uint64_t rows_before, const StreamInfo& info,
                                      std::span<const Frame> frames) {
    if (frames.size() > kMaxBlockRows)
        throw std::length_error("a block of " + std::to_string(frames.size()) + " frames, at most " +
                                std::to_string(kMaxBlockRows) + " expected");
    if (info.ride_height_names.size() > kMaxRideHeights)
        throw std::length_error("a stream of " + std::to_string(info.ride_height_names.size()) +
                                " ride heights, at most " + std::to_string(kMaxRideHeights) + " expected");
    wire::FrameBlock& block = memory_->fresh();
    put_id(id, *block.mutable_id());
    block.set_rows_before(rows_before);
    block.set_origin(info.origin);
    auto& steps = *block.mutable_time_step_ns();
    steps.Reserve(static_cast<int>(frames.size()));
    std::int64_t before_ns = 0;
    for (const Frame& frame : frames) {
        steps.AddAlreadyReserved(difference(frame.time_ns, before_ns));
        before_ns = frame.time_ns;
    }
    frames_to_columns(info, frames, block);
    block.SerializeToString(&memory_->bytes);
    return memory_->bytes;
}

struct BlockDecoder::Memory : MessageArena {};

BlockDecoder::BlockDecoder() : memory_(std::make_unique<Memory>()) {}
BlockDecoder::~BlockDecoder() = default;
BlockDecoder::BlockDecoder(BlockDecoder&&) noexcept = default;
BlockDecoder& BlockDecoder::operator=(BlockDecoder&&) noexcept = default;

std::optional<Error> BlockDecoder::decode(std::string_view bytes, Block& into) {
    if (bytes.size() > kMaxMessageBytes)
        return no_block(std::to_string(bytes.size()) + " bytes, at most " + std::to_string(kMaxMessageBytes) +
                        " expected");
    wire::FrameBlock& block = memory_->fresh();
    if (!block.ParseFromArray(bytes.data(), static_cast<int>(bytes.size())))
        return no_block("the bytes do not follow the schema");
    if (!block.has_id()) return no_block("it has no id");
    const auto& steps = block.time_step_ns();
    if (static_cast<std::size_t>(steps.size()) > kMaxBlockRows)
        return no_block(std::to_string(steps.size()) + " rows, at most " + std::to_string(kMaxBlockRows) +
                        " expected");

    into.id = get_id(block.id());
    into.rows_before = block.rows_before();
    into.info = {};
    into.info.origin = block.origin();
    into.frames.assign(static_cast<std::size_t>(steps.size()), Frame{});
    std::int64_t time_ns = 0;
    for (int row = 0; row < steps.size(); ++row) {
        time_ns = sum(time_ns, steps[row]);
        into.frames[static_cast<std::size_t>(row)].time_ns = time_ns;
    }
    if (auto why = columns_to_frames(block, into.info, into.frames)) return no_block(*why);
    return std::nullopt;
}

std::string encode_end(const End& end) {
    wire::EndMsg message;
    put_id(end.id, *message.mutable_id());
    message.set_rows(end.rows);
    message.set_complete(end.complete);
    message.set_reason(end.reason);
    return message.SerializeAsString();
}

Result<End> decode_end(std::string_view bytes) {
    wire::EndMsg message;
    if (bytes.size() > kMaxMessageBytes ||
        !message.ParseFromArray(bytes.data(), static_cast<int>(bytes.size())) || !message.has_id())
        return Error{.message = "no sound end message: the bytes do not follow the schema"};
    return End{get_id(message.id()), message.rows(), message.complete(), message.reason()};
}

}  // namespace holdfast::proto
