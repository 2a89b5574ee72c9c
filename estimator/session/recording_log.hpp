// SPDX-License-Identifier: MIT
// A native recording as a log. Damaged places are passed over by its reader; error() tells of them once the
// frames that are sound have come.
#pragma once

#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "estimator/session/log_source.hpp"
#include "proto/recording.hpp"

namespace holdfast::session {

class RecordingLog final : public LogSource {
  public:
    [[nodiscard]] static Result<std::unique_ptr<LogSource>> open(const std::string& path, bool strict);

    [[nodiscard]] const StreamInfo& info() const override { return info_; }
    [[nodiscard]] bool next(Frame& frame) override;
    [[nodiscard]] const std::optional<Error>& error() const override { return error_; }
    [[nodiscard]] const std::vector<std::string>& left_out() const override { return left_out_; }
    [[nodiscard]] double progress() const override { return reader_.progress(); }

  private:
    RecordingLog(const std::string& path, proto::RecordingReader reader, bool strict);
    bool refuse(const Frame& frame);  // LogOptions::strict

    std::string path_;
    proto::RecordingReader reader_;
    StreamInfo info_;
    bool strict_;
    std::optional<std::int64_t> last_time_ns_;
    std::vector<std::string> left_out_;  // a recording has only channels of the vocabulary
    std::optional<Error> error_;
};

}  // namespace holdfast::session
