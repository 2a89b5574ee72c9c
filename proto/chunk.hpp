// SPDX-License-Identifier: MIT
// The chunk: what a recording is made of. A header of 24 bytes, little endian, and a payload:
//
//     0  marker, 8 bytes        the same for all chunks; chosen so that text transfer or a cleared eighth bit
//     spoils it 8  kind, u32
//    12  payload length, u32
//    16  payload CRC-32, u32    as in zlib, gzip, PNG
//    20  header CRC-32, u32     of bytes 0 to 19: a length is not believed without it
//    24  payload
//
// A reader that has lost its place looks for the next marker whose header is sound.
#pragma once

#include <cstdint>
#include <memory>
#include <optional>
#include <string>
#include <string_view>

namespace holdfast::proto {

enum class ChunkKind : std::uint32_t {
    frames = 1,  // zstd frame of a FrameBlock
    index = 2,   // zstd frame of an IndexMsg
    end = 3,     // RecordingEnd; the last bytes of a file that was ended properly
};

inline constexpr std::size_t kChunkHeaderBytes = 24;
inline constexpr std::string_view kChunkMarker{"\x89HFR\r\n\x1a\x01",
                                               8};  // last byte: version of the framing

struct ChunkHeader {
    std::uint32_t kind = 0;  // a ChunkKind, or one of a newer program
    std::uint32_t payload_bytes = 0;
    std::uint32_t payload_crc = 0;
};

void append_chunk(ChunkKind kind, std::string_view payload, std::string& out);

// Nothing: these are no sound header. Takes the first kChunkHeaderBytes of `bytes`.
[[nodiscard]] std::optional<ChunkHeader> read_chunk_header(std::string_view bytes);
[[nodiscard]] bool is_sound(const ChunkHeader& header, std::string_view payload);

// Little-endian integers in a byte string.
void append_u32(std::uint32_t value, std::string& out);
void append_u64(std::uint64_t value, std::string& out);
[[nodiscard]] std::uint32_t read_u32(std::string_view bytes, std::size_t at);
[[nodiscard]] std::uint64_t read_u64(std::string_view bytes, std::size_t at);

// zstd, with its work space kept from payload to payload.
class Packer {
  public:
    Packer();
    ~Packer();
    Packer(Packer&&) noexcept;
    Packer& operator=(Packer&&) noexcept;
    // Good until the next call.
    [[nodiscard]] std::string_view pack(std::string_view bytes);

  private:
    struct Memory;
    std::unique_ptr<Memory> memory_;
};

class Unpacker {
  public:
    Unpacker();
    ~Unpacker();
    Unpacker(Unpacker&&) noexcept;
    Unpacker& operator=(Unpacker&&) noexcept;
    // Nothing: no zstd frame, or one of more than kMaxMessageBytes. Good until the next call.
    [[nodiscard]] std::optional<std::string_view> unpack(std::string_view packed);

  private:
    struct Memory;
    std::unique_ptr<Memory> memory_;
};

}  // namespace holdfast::proto
