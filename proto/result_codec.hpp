// SPDX-License-Identifier: MIT
// What the estimator publishes, to bytes and back. As in codec.hpp, any bytes may be decoded. Schema:
// holdfast.proto.
#pragma once

#include <cstdint>
#include <string>
#include <string_view>
#include <vector>

#include "estimator/core/results.hpp"
#include "proto/codec.hpp"
#include "proto/result.hpp"

namespace holdfast::proto {

struct EstimateMessage {
    MessageId id;
    core::Estimate estimate;
};
struct ClosureMessage {
    MessageId id;
    core::Closure closure;
};
struct AlarmMessage {
    MessageId id;
    core::Alarm alarm;
    std::string channel_name;  // as the log calls it, ride heights too; of alarm.channel
};
struct HealthMessage {
    MessageId id;
    std::int64_t time_ns = 0;
    std::vector<std::string> ride_height_names;  // of the stream, by slot
    core::HealthTable health;                    // ride heights without a name stay as if never touched
};

[[nodiscard]] std::string encode_estimate(const EstimateMessage& message);
[[nodiscard]] std::string encode_closure(const ClosureMessage& message);
[[nodiscard]] std::string encode_alarm(const AlarmMessage& message);
[[nodiscard]] std::string encode_health(const HealthMessage& message);

// An enumerator that this program does not know, as a newer one may send, is an error that names it.
[[nodiscard]] Result<EstimateMessage> decode_estimate(std::string_view bytes);
[[nodiscard]] Result<ClosureMessage> decode_closure(std::string_view bytes);
[[nodiscard]] Result<AlarmMessage> decode_alarm(std::string_view bytes);
[[nodiscard]] Result<HealthMessage> decode_health(std::string_view bytes);

}  // namespace holdfast::proto
