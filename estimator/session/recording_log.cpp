// SPDX-License-Identifier: MIT
#include "estimator/session/recording_log.hpp"

#include <cmath>
#include <utility>

#include "estimator/session/cell.hpp"

namespace holdfast::session {
namespace {

Error from_recording(const proto::Error& error) {
    return {.file = error.file, .message = "byte " + std::to_string(error.offset) + ": " + error.message};
}

}  // namespace

Result<std::unique_ptr<LogSource>> RecordingLog::open(const std::string& path, bool strict) {
    auto reader = proto::RecordingReader::open(path);
    if (!reader) return from_recording(reader.error());
    return std::unique_ptr<LogSource>(new RecordingLog(path, std::move(*reader), strict));
}

RecordingLog::RecordingLog(const std::string& path, proto::RecordingReader reader, bool strict)
    : path_(path), reader_(std::move(reader)), info_(reader_.info()), strict_(strict) {
    info_.origin = path;  // what the user called it, for messages
}

bool RecordingLog::next(Frame& frame) {
    if (error_) return false;
    if (reader_.next(frame)) return !strict_ || !refuse(frame);
    if (reader_.error()) error_ = from_recording(*reader_.error());
    return false;
}

bool RecordingLog::refuse(const Frame& frame) {
    const auto complain = [&](const std::string& what) {
        error_ = Error{.file = path_,
                       .message = "at " + time_text_s(frame.time_ns) + " s: " + what + " (--strict)"};
        return true;
    };
    if (last_time_ns_ == frame.time_ns)
        return complain("the time of the frame before again; expected a later one");
    last_time_ns_ = frame.time_ns;
    for (std::size_t i = 0; i < kChannelCount; ++i) {
        const auto channel = static_cast<Channel>(i);
        if (!frame.has(channel) || std::isfinite(frame.get(channel))) continue;
        return complain(std::string(holdfast::info(channel).name) + " is " + number_text(frame.get(channel)) +
                        "; expected a finite number");
    }
    return false;
}

}  // namespace holdfast::session
