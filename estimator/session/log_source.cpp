// SPDX-License-Identifier: MIT
#include "estimator/session/log_source.hpp"

#include <utility>

#include "estimator/session/csv_log.hpp"
#include "estimator/session/recording_log.hpp"

namespace holdfast::session {

Result<std::unique_ptr<LogSource>> open_log(const std::string& path, const LogOptions& options) {
    Result<RawFile> file = RawFile::open(path);
    if (!file) return file.errors();
    const auto beginning = file->unread();
    if (!proto::is_recording({beginning.data(), beginning.size()})) {
        return CsvLog::open(path, unpack(std::move(*file)), options);
    }
    if (!options.channels.channels.empty()) {
        return Error{
            .file = options.channels.file,
            .message = path +
                       " is a recording, whose channels have their names already; expected a CSV log "
                       "with a channel map"};
    }
    return RecordingLog::open(path, options.strict);
}

Result<std::unique_ptr<LogSource>> open_log(const std::string& path, const std::string& channel_map,
                                            bool strict) {
    LogOptions options{.channels = {}, .strict = strict};
    if (!channel_map.empty()) {
        auto map = read_channel_map(channel_map);
        if (!map) return map.errors();
        options.channels = std::move(*map);
    }
    return open_log(path, options);
}

}  // namespace holdfast::session
