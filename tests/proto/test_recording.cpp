// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>

#include "tests/proto/recording_files.hpp"

namespace holdfast::proto {
namespace {

using namespace holdfast::testing;

TEST_CASE("a recording gives back its frames bit by bit, and what it knows of its source") {
    const std::uint32_t seed = GENERATE(21U, 22U, 23U);
    INFO("seed " << seed);
    const TempFolder folder;
    const std::string path = folder / "outing.hfr";
    const StreamInfo info = named_stream(3);
    const std::vector<Frame> frames = random_frames(10'000, info, seed);  // about 25 s: many chunks
    write_recording(path, info, frames);

    auto reader = RecordingReader::open(path);
    REQUIRE(reader);
    CHECK(reader->info().ride_height_names == info.ride_height_names);
    CHECK(reader->info().channels == info.channels);
    CHECK(reader->info().origin == info.origin);
    const ReadBack back = read_recording(path);
    CHECK(back.error.empty());
    CHECK(same_bits(back.frames, frames));
    CHECK(is_recording(read_bytes(path)));
}

TEST_CASE("the same frames make the same bytes") {
    const TempFolder folder;
    const StreamInfo info = named_stream(2);
    const std::vector<Frame> frames = random_frames(500, info, 31);
    write_recording(folder / "a.hfr", info, frames);
    write_recording(folder / "b.hfr", info, frames);
    CHECK(read_bytes(folder / "a.hfr") == read_bytes(folder / "b.hfr"));
}

TEST_CASE("a recording without frames still tells of its source") {
    const TempFolder folder;
    const StreamInfo info = named_stream(2);
    write_recording(folder / "none.hfr", info, {});
    auto reader = RecordingReader::open(folder / "none.hfr");
    REQUIRE(reader);
    CHECK(reader->info().ride_height_names == info.ride_height_names);
    Frame frame;
    CHECK_FALSE(reader->next(frame));
    CHECK_FALSE(reader->error());
}

TEST_CASE("times that repeat or run backwards are kept: judging them is the reader's business") {
    const TempFolder folder;
    const StreamInfo info = named_stream(1);
    std::vector<Frame> frames = random_frames(4, info, 41);
    frames[0].time_ns = 5'000'000'000;
    frames[1].time_ns = 5'000'000'000;
    frames[2].time_ns = -3;
    frames[3].time_ns = 7'000'000'000;
    write_recording(folder / "odd.hfr", info, frames);
    CHECK(same_bits(read_recording(folder / "odd.hfr").frames, frames));
    auto reader = RecordingReader::open(folder / "odd.hfr");
    REQUIRE(reader);
    CHECK_FALSE(reader->seek(0));
}

TEST_CASE("what has lasted a second of source time is in the file before it is ended") {
    const TempFolder folder;
    const std::string path = folder / "killed.hfr";
    const StreamInfo info = named_stream(1);
    const std::vector<Frame> frames = frames_of_chunks(3, 5, info, 51);
    auto writer = RecordingWriter::create(path, info);
    REQUIRE(writer);
    for (const Frame& frame : frames) REQUIRE_FALSE(writer->write(frame));

    const ReadBack back = read_recording(path);  // while the writer is still there, and has ended nothing
    CHECK(same_bits(back.frames, {frames.begin(), frames.begin() + 10}));
    CHECK_THAT(back.error, Catch::Contains("without its end mark"));
}

TEST_CASE("a recording of an input that broke off says so") {
    const TempFolder folder;
    const StreamInfo info = named_stream(1);
    const std::vector<Frame> frames = random_frames(20, info, 61);
    write_recording(folder / "broken.hfr", info, frames, false);
    const ReadBack back = read_recording(folder / "broken.hfr");
    CHECK(same_bits(back.frames, frames));
    CHECK_THAT(back.error, Catch::Contains("broke off"));
}

TEST_CASE("seeking goes on with the first frame at or after the time") {
    const TempFolder folder;
    const StreamInfo info = named_stream(2);
    const std::vector<Frame> frames = frames_of_chunks(20, 7, info, 71);
    write_recording(folder / "outing.hfr", info, frames);
    auto reader = RecordingReader::open(folder / "outing.hfr");
    REQUIRE(reader);
    for (std::size_t i : {0U, 139U, 7U, 6U, 70U, 1U}) {
        for (const std::int64_t before_ns : {0, 1}) {
            REQUIRE(reader->seek(frames[i].time_ns - before_ns));
            Frame frame;
            for (std::size_t j = i; j < frames.size(); ++j) {
                REQUIRE(reader->next(frame));
                REQUIRE(same_bits(frame, frames[j]));
            }
            CHECK_FALSE(reader->next(frame));
            CHECK_FALSE(reader->error());
        }
    }
    REQUIRE(reader->seek(frames.back().time_ns + 1));
    Frame frame;
    CHECK_FALSE(reader->next(frame));
    CHECK_FALSE(reader->error());
}

TEST_CASE("without its index a recording reads from the front, and cannot seek") {
    const TempFolder folder;
    const std::string path = folder / "outing.hfr";
    const StreamInfo info = named_stream(2);
    const std::vector<Frame> frames = frames_of_chunks(3, 5, info, 81);
    write_recording(path, info, frames);
    const std::string whole = read_bytes(path);
    const auto offsets = chunk_offsets(whole);
    REQUIRE(offsets.size() == 3 + 2 + 1);
    std::string bytes = whole.substr(0, offsets[3]);  // chunks of frames; then an end that names no index
    append_chunk(ChunkKind::end, encode_recording_end({.rows = 15, .chunks = 3}), bytes);
    write_bytes(path, bytes);

    const ReadBack back = read_recording(path);
    CHECK(back.error.empty());
    CHECK(same_bits(back.frames, frames));
    auto reader = RecordingReader::open(path);
    REQUIRE(reader);
    CHECK_FALSE(reader->seek(0));
    Frame frame;
    CHECK(reader->next(frame));  // and nothing has changed
    CHECK(same_bits(frame, frames[0]));
}

TEST_CASE("a chunk of a kind that a newer program writes is passed over") {
    const TempFolder folder;
    const std::string path = folder / "newer.hfr";
    const StreamInfo info = named_stream(2);
    const std::vector<Frame> frames = frames_of_chunks(2, 5, info, 91);
    write_recording(path, info, frames);
    std::string bytes = read_bytes(path);
    std::string added;
    append_chunk(static_cast<ChunkKind>(99), "something new", added);
    bytes.insert(chunk_offsets(bytes)[1], added);
    write_bytes(path, bytes);
    const ReadBack back = read_recording(path);
    CHECK(back.error.empty());
    CHECK(same_bits(back.frames, frames));
}

}  // namespace
}  // namespace holdfast::proto
