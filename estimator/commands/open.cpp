// SPDX-License-Identifier: MIT
#include "estimator/commands/open.hpp"

#include <iostream>
#include <utility>

#include "estimator/commands/stage.hpp"

namespace holdfast::commands {

std::unique_ptr<session::LogSource> open(const std::string& log, const std::string& channels, bool strict) {
    auto source = session::open_log(log, channels, strict);
    if (!source) {
        tell(source.errors());
        return nullptr;
    }
    if (const auto& names = (*source)->left_out(); !names.empty())
        std::cerr << "note: " << log << ": columns not used: " << session::joined(names) << '\n';
    return std::move(*source);
}

}  // namespace holdfast::commands
