// SPDX-License-Identifier: MIT
// A log in, whatever its form: frames in the order of the file, in SI units.
#pragma once

#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "estimator/session/channel_map.hpp"
#include "estimator/session/error.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::session {

struct LogOptions {
    ChannelMap channels;  // empty: the log uses the contract's own names
    bool strict = false;  // a number that is not finite or a time that repeats is an error, not a count
};

class LogSource {
  public:
    virtual ~LogSource() = default;

    [[nodiscard]] virtual const StreamInfo& info() const = 0;

    // False: the log has ended, or broke. What was read well has been delivered by then; error() tells which.
    [[nodiscard]] virtual bool next(Frame& frame) = 0;
    // Set once the log broke: its results are incomplete (exit status 3).
    [[nodiscard]] virtual const std::optional<Error>& error() const = 0;

    // Columns that the log has and nobody here knows, as they are called there.
    [[nodiscard]] virtual const std::vector<std::string>& left_out() const = 0;
    // Share of the file that has been read, 0..1; 0 where that is not known.
    [[nodiscard]] virtual double progress() const = 0;
};

// A CSV log (plain, gzip, zstd) or a native recording, told apart by content. Errors here are those of a file
// that cannot be read at all or whose header is no use (exit status 1).
[[nodiscard]] Result<std::unique_ptr<LogSource>> open_log(const std::string& path, const LogOptions& options);

// As a command line asks for it: with the file of a channel map, or an empty name.
[[nodiscard]] Result<std::unique_ptr<LogSource>> open_log(const std::string& path,
                                                          const std::string& channel_map, bool strict);

}  // namespace holdfast::session
