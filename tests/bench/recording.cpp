// SPDX-License-Identifier: MIT
// How fast a recording is read, and blocks are encoded and decoded.
//   bench_recording FILE.hfr...
#include "proto/recording.hpp"

#include <algorithm>
#include <bit>
#include <chrono>
#include <cstdio>
#include <functional>
#include <iostream>
#include <string>
#include <vector>

#include "proto/codec.hpp"

namespace {

using namespace holdfast;

std::size_t samples_of(std::span<const Frame> frames) {
    std::size_t samples = 0;
    for (const Frame& frame : frames) samples += static_cast<std::size_t>(std::popcount(frame.present));
    return samples;
}

// The best of a few runs.
void tell(const char* what, std::size_t frames, std::size_t samples, const std::function<void()>& run) {
    constexpr int kRuns = 7;
    double best_s = 1e9;
    for (int i = 0; i < kRuns; ++i) {
        const auto begin = std::chrono::steady_clock::now();
        run();
        best_s =
            std::min(best_s, std::chrono::duration<double>(std::chrono::steady_clock::now() - begin).count());
    }
    std::printf("  %-26s %7.1f ms  %6.2f M frames/s  %6.1f M samples/s\n", what, best_s * 1e3,
                static_cast<double>(frames) / best_s * 1e-6, static_cast<double>(samples) / best_s * 1e-6);
}

void read_all(const std::string& path, std::vector<Frame>* into) {
    auto reader = proto::RecordingReader::open(path);
    if (!reader) throw std::runtime_error(proto::to_string(reader.error()));
    for (auto frames = reader->next_frames(); !frames.empty(); frames = reader->next_frames())
        if (into != nullptr) into->insert(into->end(), frames.begin(), frames.end());
}

void measure(const std::string& path) {
    std::vector<Frame> frames;
    read_all(path, &frames);
    const std::size_t samples = samples_of(frames);
    std::printf("%s: %zu frames, %zu samples\n", path.c_str(), frames.size(), samples);
    tell("read the recording", frames.size(), samples, [&] { read_all(path, nullptr); });

    const StreamInfo info = proto::RecordingReader::open(path)->info();
    for (const std::size_t rows : {std::size_t{1}, std::size_t{512}}) {
        proto::BlockEncoder encoder;
        proto::BlockDecoder decoder;
        proto::Block block;
        std::vector<std::string> messages;
        const auto encode = [&](bool keep) {
            for (std::size_t i = 0; i < frames.size(); i += rows) {
                const auto part = std::span(frames).subspan(i, std::min(rows, frames.size() - i));
                const std::string_view bytes = encoder.encode({1, i / rows}, i, info, part);
                if (keep) messages.emplace_back(bytes);
            }
        };
        encode(true);
        const std::string size = std::to_string(rows) + " a message";
        tell(("encode, " + size).c_str(), frames.size(), samples, [&] { encode(false); });
        tell(("decode, " + size).c_str(), frames.size(), samples, [&] {
            for (const std::string& message : messages)
                if (decoder.decode(message, block)) throw std::runtime_error("a message does not decode");
        });
    }
}

}  // namespace

int main(int argc, char** argv) {
    if (argc < 2) {
        std::cerr << "usage: bench_recording FILE.hfr...\n";
        return 2;
    }
    try {
        for (int i = 1; i < argc; ++i) measure(argv[i]);
    } catch (const std::exception& error) {
        std::cerr << "error: " << error.what() << '\n';
        return 1;
    }
}
