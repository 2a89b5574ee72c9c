// SPDX-License-Identifier: MIT
// Opening a log as the command line names it.
#pragma once

#include <memory>
#include <string>

#include "estimator/session/log_source.hpp"

namespace holdfast::commands {

// The log, or nullptr: what was wrong has been told on standard error. `channels`: a channel map, or empty.
// Columns that nobody here knows are told as a note.
[[nodiscard]] std::unique_ptr<session::LogSource> open(const std::string& log, const std::string& channels,
                                                       bool strict);

}  // namespace holdfast::commands
