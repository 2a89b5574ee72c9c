// SPDX-License-Identifier: MIT
// What is said on the link: a message has two parts, the topic's name and a Protobuf message
// (proto/README.md).
#pragma once

#include <cstdint>
#include <optional>
#include <string_view>

namespace holdfast::link {

enum class Topic : std::uint8_t { frames, estimate, closure, alarm, health, end };
inline constexpr std::size_t kTopicCount = 6;

[[nodiscard]] std::string_view name(Topic topic);
[[nodiscard]] std::optional<Topic> topic_named(std::string_view name);

// Longest message that a subscriber takes: a thousand times a live one, and some seconds of every channel in
// a replay.
inline constexpr std::size_t kMaxWireBytes = 8U << 20U;

}  // namespace holdfast::link
