// SPDX-License-Identifier: MIT
// A recording with anything cut, changed, missing, doubled or added: what is delivered is right and in order,
// what can be delivered is, and the reader says that something is wrong.
#include <catch2/catch.hpp>

#include "tests/proto/recording_files.hpp"

namespace holdfast::proto {
namespace {

using namespace holdfast::testing;

constexpr std::size_t kChunks = 4;
constexpr std::size_t kRows = 3;
constexpr std::uint32_t kSeed = 101;

// A whole recording of four chunks of three frames.
struct Small {
    TempFolder folder;
    std::string path = folder / "small.hfr";
    StreamInfo info = named_stream(2);
    std::vector<Frame> frames = frames_of_chunks(kChunks, kRows, info, kSeed);
    std::string bytes;
    std::vector<std::size_t> offsets;

    Small() {
        write_recording(path, info, frames);
        bytes = read_bytes(path);
        offsets = chunk_offsets(bytes);
    }
    [[nodiscard]] std::string chunk(std::size_t i) const {
        return bytes.substr(offsets[i], offsets[i + 1] - offsets[i]);
    }
    [[nodiscard]] std::vector<Frame> without_chunk(std::size_t i) const {
        std::vector<Frame> rest = frames;
        const auto first = rest.begin() + static_cast<std::ptrdiff_t>(i * kRows);
        rest.erase(first, first + kRows);
        return rest;
    }
    [[nodiscard]] ReadBack read(std::string_view changed) const {
        write_bytes(path, changed);
        return read_recording(path);
    }
};

TEST_CASE("cut at every byte, a recording reads to its last whole chunk and says that it was cut") {
    const Small small;
    INFO("seed " << kSeed);
    REQUIRE(small.offsets.size() == kChunks + 2 + 1);
    for (std::size_t size = 0; size < small.bytes.size(); ++size) {
        INFO("cut to " << size << " of " << small.bytes.size() << " bytes");
        const ReadBack back = small.read(std::string_view(small.bytes).substr(0, size));
        std::size_t whole = 0;
        while (whole < kChunks && small.offsets[whole + 1] <= size) ++whole;
        REQUIRE(back.opened == (whole > 0));
        REQUIRE_FALSE(back.error.empty());
        REQUIRE(same_bits(back.frames, {small.frames.begin(),
                                        small.frames.begin() + static_cast<std::ptrdiff_t>(whole * kRows)}));
    }
    CHECK(small.read(small.bytes).error.empty());
}

TEST_CASE("with any byte changed, a recording gives every other chunk and says that it was damaged") {
    const Small small;
    INFO("seed " << kSeed);
    for (std::size_t at = 0; at < small.bytes.size(); ++at) {
        for (const int change : {1 << (at % 8), 0xFF}) {
            INFO("byte " << at << " of " << small.bytes.size() << " xor " << change);
            std::string changed = small.bytes;
            changed[at] = static_cast<char>(changed[at] ^ change);
            const ReadBack back = small.read(changed);
            REQUIRE(back.opened);
            REQUIRE_FALSE(back.error.empty());
            REQUIRE(back.damage.places == 1);
            std::size_t hit = 0;
            while (small.offsets[hit + 1] <= at) ++hit;
            REQUIRE(same_bits(back.frames, hit < kChunks ? small.without_chunk(hit) : small.frames));
            // With the end mark itself hit, nothing tells of rows after the last one read; there are none.
            REQUIRE(back.damage.rows_lost == (hit < kChunks ? kRows : 0));
        }
    }
}

TEST_CASE("a chunk that is missing altogether is noticed by the count of rows") {
    const Small small;
    for (std::size_t gone = 0; gone < kChunks; ++gone) {
        INFO("chunk " << gone);
        std::string changed = small.bytes;
        changed.erase(small.offsets[gone], small.chunk(gone).size());
        const ReadBack back = small.read(changed);
        CHECK(same_bits(back.frames, small.without_chunk(gone)));
        CHECK(back.damage.rows_lost == kRows);
        CHECK_THAT(back.error, Catch::Contains("missing") && Catch::Contains("3 frames known to be lost"));
    }
}

TEST_CASE("a chunk that comes twice, or late, is not delivered again") {
    const Small small;
    const std::string doubled =
        small.bytes.substr(0, small.offsets[2]) + small.chunk(0) + small.bytes.substr(small.offsets[2]);
    const ReadBack back = small.read(doubled);
    CHECK(same_bits(back.frames, small.frames));
    CHECK_THAT(back.error, Catch::Contains("has been there before"));
}

TEST_CASE("a chunk of another recording is not mixed in") {
    const Small small;
    StreamInfo other = named_stream(1);
    write_recording(small.path, other, frames_of_chunks(2, kRows, other, kSeed + 1));
    const std::string foreign = read_bytes(small.path);
    const std::string second = foreign.substr(chunk_offsets(foreign)[1]);
    const ReadBack back = small.read(small.bytes.substr(0, small.offsets[1]) + second);
    CHECK(same_bits(back.frames, {small.frames.begin(), small.frames.begin() + kRows}));
    CHECK_THAT(back.error, Catch::Contains("another recording"));
}

TEST_CASE("bytes lost or added within a chunk cost that chunk only") {
    const Small small;
    const std::size_t inside = small.offsets[1] + 40;
    std::string shorter = small.bytes;
    shorter.erase(inside, 5);
    CHECK(same_bits(small.read(shorter).frames, small.without_chunk(1)));
    std::string longer = small.bytes;
    longer.insert(inside, "added");
    CHECK(same_bits(small.read(longer).frames, small.without_chunk(1)));
}

TEST_CASE("bytes before the first chunk or after the end mark are told of, and cost no frame") {
    const Small small;
    const ReadBack before = small.read("rubbish" + small.bytes);
    CHECK(same_bits(before.frames, small.frames));
    CHECK_THAT(before.error, Catch::Contains("byte 0") && Catch::Contains("7 bytes passed over"));
    const ReadBack after = small.read(small.bytes + "rubbish");
    CHECK(same_bits(after.frames, small.frames));
    CHECK_THAT(after.error, Catch::Contains("7 bytes after the end mark"));
}

TEST_CASE("what is no recording is an error that names the file") {
    const Small small;
    const ReadBack text = small.read("t[s],speed[m/s]\n0,1\n");
    CHECK_FALSE(text.opened);
    CHECK_THAT(text.error, Catch::Contains("small.hfr") && Catch::Contains("is no recording"));
    CHECK_THAT(small.read("").error, Catch::Contains("is empty"));
    CHECK_THAT(read_recording(small.folder / "nowhere.hfr").error, Catch::Contains("cannot be opened"));
    CHECK_THAT(read_recording(small.folder.path().string()).error, Catch::Contains("no regular file"));
}

}  // namespace
}  // namespace holdfast::proto
