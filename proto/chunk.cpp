// SPDX-License-Identifier: MIT
#include "proto/chunk.hpp"

#include <zlib.h>
#include <zstd.h>

#include "proto/codec.hpp"

namespace holdfast::proto {
namespace {

constexpr std::size_t kKindAt = 8;
constexpr std::size_t kPayloadBytesAt = 12;
constexpr std::size_t kPayloadCrcAt = 16;
constexpr std::size_t kHeaderCrcAt = 20;

// Noisy doubles gain little from more: 6 % at level 9, for five times the time.
constexpr int kCompressionLevel = 3;

std::uint32_t crc(std::string_view bytes) {
    return static_cast<std::uint32_t>(
        ::crc32_z(0, reinterpret_cast<const Bytef*>(bytes.data()), bytes.size()));
}

template <class Unsigned>
void append_little_endian(Unsigned value, std::string& out) {
    for (std::size_t i = 0; i < sizeof value; ++i)
        out.push_back(static_cast<char>((value >> (8 * i)) & 0xFFU));
}

template <class Unsigned>
Unsigned read_little_endian(std::string_view bytes, std::size_t at) {
    Unsigned value = 0;
    for (std::size_t i = 0; i < sizeof value; ++i)
        value |= static_cast<Unsigned>(static_cast<unsigned char>(bytes[at + i])) << (8 * i);
    return value;
}

}  // namespace

void append_u32(std::uint32_t value, std::string& out) {
    append_little_endian(value, out);
}
void append_u64(std::uint64_t value, std::string& out) {
    append_little_endian(value, out);
}
std::uint32_t read_u32(std::string_view bytes, std::size_t at) {
    return read_little_endian<std::uint32_t>(bytes, at);
}
std::uint64_t read_u64(std::string_view bytes, std::size_t at) {
    return read_little_endian<std::uint64_t>(bytes, at);
}

void append_chunk(ChunkKind kind, std::string_view payload, std::string& out) {
    const std::size_t begin = out.size();
    out += kChunkMarker;
    append_u32(static_cast<std::uint32_t>(kind), out);
    append_u32(static_cast<std::uint32_t>(payload.size()), out);
    append_u32(crc(payload), out);
    append_u32(crc(std::string_view(out).substr(begin, kHeaderCrcAt)), out);
    out += payload;
}

std::optional<ChunkHeader> read_chunk_header(std::string_view bytes) {
    if (bytes.size() < kChunkHeaderBytes || !bytes.starts_with(kChunkMarker) ||
        read_u32(bytes, kHeaderCrcAt) != crc(bytes.substr(0, kHeaderCrcAt)))
        return std::nullopt;
    const ChunkHeader header{read_u32(bytes, kKindAt), read_u32(bytes, kPayloadBytesAt),
                             read_u32(bytes, kPayloadCrcAt)};
    if (header.payload_bytes > kMaxMessageBytes)
        return std::nullopt;  // no writer makes such: not worth the memory
    return header;
}

bool is_sound(const ChunkHeader& header, std::string_view payload) {
    return payload.size() == header.payload_bytes && crc(payload) == header.payload_crc;
}

struct Packer::Memory {
    std::unique_ptr<ZSTD_CCtx, std::size_t (*)(ZSTD_CCtx*)> context{ZSTD_createCCtx(), ZSTD_freeCCtx};
    std::string bytes;
};

Packer::Packer() : memory_(std::make_unique<Memory>()) {}
Packer::~Packer() = default;
Packer::Packer(Packer&&) noexcept = default;
Packer& Packer::operator=(Packer&&) noexcept = default;

std::string_view Packer::pack(std::string_view bytes) {
    std::string& out = memory_->bytes;
    out.resize(ZSTD_compressBound(bytes.size()));
    const std::size_t size = ZSTD_compressCCtx(memory_->context.get(), out.data(), out.size(), bytes.data(),
                                               bytes.size(), kCompressionLevel);
    if (ZSTD_isError(size) != 0) throw std::bad_alloc();  // its only cause here: the bound is kept
    return std::string_view(out).substr(0, size);
}

struct Unpacker::Memory {
    std::unique_ptr<ZSTD_DCtx, std::size_t (*)(ZSTD_DCtx*)> context{ZSTD_createDCtx(), ZSTD_freeDCtx};
    std::string bytes;
};

Unpacker::Unpacker() : memory_(std::make_unique<Memory>()) {}
Unpacker::~Unpacker() = default;
Unpacker::Unpacker(Unpacker&&) noexcept = default;
Unpacker& Unpacker::operator=(Unpacker&&) noexcept = default;

std::optional<std::string_view> Unpacker::unpack(std::string_view packed) {
    const unsigned long long size = ZSTD_getFrameContentSize(packed.data(), packed.size());
    if (size == ZSTD_CONTENTSIZE_UNKNOWN || size == ZSTD_CONTENTSIZE_ERROR || size > kMaxMessageBytes)
        return std::nullopt;
    std::string& out = memory_->bytes;
    if (out.size() < size) out.resize(size);
    const std::size_t got =
        ZSTD_decompressDCtx(memory_->context.get(), out.data(), size, packed.data(), packed.size());
    if (got != size) return std::nullopt;
    return std::string_view(out).substr(0, size);
}

}  // namespace holdfast::proto
