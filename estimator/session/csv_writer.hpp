// SPDX-License-Identifier: MIT
// Frames into a CSV log in SI units; each number is the shortest text that reads back to the same bits, time
// is exact to the nanosecond, so that a log converted to and fro loses nothing. (Of a "not a number" only
// that it is one stays.)
#pragma once

#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "estimator/session/byte_sink.hpp"
#include "estimator/session/error.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::session {

class CsvWriter {
  public:
    // A column for each channel that `stream` says it has; .gz and .zst by name.
    [[nodiscard]] static Result<CsvWriter> create(const std::string& path, const StreamInfo& stream);

    // Set: it could not be written, or carries a channel that the stream did not announce.
    [[nodiscard]] std::optional<Error> write(const Frame& frame);
    // Without it the file is cut.
    [[nodiscard]] std::optional<Error> finish();

  private:
    CsvWriter(std::string path, std::unique_ptr<ByteSink> sink, const StreamInfo& stream);
    std::optional<Error> flush();

    std::string path_;
    std::unique_ptr<ByteSink> sink_;
    std::vector<Channel> columns_;
    std::uint64_t announced_ = 0;
    std::string text_;
};

}  // namespace holdfast::session
