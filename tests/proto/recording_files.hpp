// SPDX-License-Identifier: MIT
// Small recordings for the tests, and what a reader makes of a file.
#pragma once

#include <fstream>
#include <sstream>
#include <stdexcept>
#include <string>
#include <vector>

#include "proto/recording.hpp"
#include "tests/proto/random_frames.hpp"
#include "tests/temp_folder.hpp"

namespace holdfast::testing {

inline std::string read_bytes(const std::string& path) {
    std::ifstream in(path, std::ios::binary);
    std::ostringstream bytes;
    bytes << in.rdbuf();
    return bytes.str();
}

inline void write_bytes(const std::string& path, std::string_view bytes) {
    std::ofstream out(path, std::ios::binary | std::ios::trunc);
    out.write(bytes.data(), static_cast<std::streamsize>(bytes.size()));
    if (!out.flush()) throw std::runtime_error("cannot write " + path);
}

inline void write_recording(const std::string& path, const StreamInfo& info, const std::vector<Frame>& frames,
                            bool complete = true) {
    auto writer = proto::RecordingWriter::create(path, info);
    if (!writer) throw std::runtime_error(proto::to_string(writer.error()));
    for (const Frame& frame : frames)
        if (auto error = writer->write(frame)) throw std::runtime_error(proto::to_string(*error));
    if (auto error = writer->finish(complete)) throw std::runtime_error(proto::to_string(*error));
}

struct ReadBack {
    bool opened = false;
    std::vector<Frame> frames;
    std::string error;  // empty: none
    proto::RecordingDamage damage;
};

inline ReadBack read_recording(const std::string& path) {
    ReadBack back;
    auto reader = proto::RecordingReader::open(path);
    if (!reader) {
        back.error = proto::to_string(reader.error());
        return back;
    }
    back.opened = true;
    Frame frame;
    while (reader->next(frame)) back.frames.push_back(frame);
    if (reader->error()) back.error = proto::to_string(*reader->error());
    back.damage = reader->damage();
    return back;
}

// Offsets at which chunks begin, and the file's size.
inline std::vector<std::size_t> chunk_offsets(std::string_view bytes) {
    std::vector<std::size_t> offsets;
    std::size_t at = 0;
    while (const auto header = proto::read_chunk_header(bytes.substr(at))) {
        offsets.push_back(at);
        at += proto::kChunkHeaderBytes + header->payload_bytes;
        if (at >= bytes.size()) break;
    }
    offsets.push_back(at);
    return offsets;
}

// `chunks` chunks of `rows` frames each: the first frames of chunks lie more than a second apart.
inline std::vector<Frame> frames_of_chunks(std::size_t chunks, std::size_t rows, const StreamInfo& info,
                                           std::uint32_t seed) {
    std::vector<Frame> frames = random_frames(chunks * rows, info, seed);
    for (std::size_t i = 0; i < frames.size(); ++i)
        frames[i].time_ns = static_cast<std::int64_t>(i / rows) * 1'500'000'000 +
                            static_cast<std::int64_t>(i % rows) * 2'500'000;
    return frames;
}

}  // namespace holdfast::testing
