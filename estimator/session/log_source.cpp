// SPDX-License-Identifier: MIT
#include "estimator/session/log_source.hpp"

#include <utility>

#include "estimator/session/csv_log.hpp"

namespace holdfast::session {

Result<std::unique_ptr<LogSource>> open_log(const std::string& path, const LogOptions& options) {
    Result<RawFile> file = RawFile::open(path);
    if (!file) return file.errors();
    return CsvLog::open(path, unpack(std::move(*file)), options);
}

}  // namespace holdfast::session
