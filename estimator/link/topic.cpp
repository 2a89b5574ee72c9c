// SPDX-License-Identifier: MIT
#include "estimator/link/topic.hpp"

#include <algorithm>
#include <array>

namespace holdfast::link {
namespace {

constexpr std::array<std::string_view, kTopicCount> kNames{"frames", "estimate", "closure",
                                                           "alarm",  "health",   "end"};

}  // namespace

std::string_view name(Topic topic) {
    return kNames[static_cast<std::size_t>(topic)];
}

std::optional<Topic> topic_named(std::string_view name) {
    const auto found = std::find(kNames.begin(), kNames.end(), name);
    if (found == kNames.end()) return std::nullopt;
    return static_cast<Topic>(found - kNames.begin());
}

}  // namespace holdfast::link
