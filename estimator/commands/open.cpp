// SPDX-License-Identifier: MIT
#include "estimator/commands/open.hpp"

#include <iostream>
#include <utility>

#include "estimator/commands/stage.hpp"

namespace holdfast::commands {

std::unique_ptr<session::LogSource> open(const std::string& log, const std::string& channels, bool strict) {
    session::LogOptions options{.channels = {}, .strict = strict};
    if (!channels.empty()) {
        auto map = session::read_channel_map(channels);
        if (!map) {
            tell(map.errors());
            return nullptr;
        }
        options.channels = std::move(*map);
    }
    auto source = session::open_log(log, options);
    if (!source) {
        tell(source.errors());
        return nullptr;
    }
    if (const auto& names = (*source)->left_out(); !names.empty())
        std::cerr << "note: " << log << ": columns not used: " << session::joined(names) << '\n';
    return std::move(*source);
}

}  // namespace holdfast::commands
