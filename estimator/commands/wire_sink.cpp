// SPDX-License-Identifier: MIT
#include "estimator/commands/wire_sink.hpp"

#include "proto/result_codec.hpp"

namespace holdfast::commands {

using link::Topic;

WireSink::WireSink(link::Publisher& publisher, const StreamInfo& stream)
    : publisher_(publisher),
      ride_height_names_(stream.ride_height_names),
      stream_id_(proto::draw_stream_id()) {}

// A listener that is too slow loses messages and sees it by their numbers; the estimator does not wait for
// it.

void WireSink::on_estimate(const core::Estimate& estimate) {
    publisher_.send(Topic::estimate, proto::encode_estimate({{stream_id_, next_.estimate++}, estimate}));
}

void WireSink::on_closure(const core::Closure& closure) {
    publisher_.send(Topic::closure, proto::encode_closure({{stream_id_, next_.closure++}, closure}));
}

void WireSink::on_alarm(const core::Alarm& alarm) {
    publisher_.send(Topic::alarm, proto::encode_alarm({{stream_id_, next_.alarm++},
                                                       alarm,
                                                       channel_name(alarm.channel, ride_height_names_)}));
}

void WireSink::on_health(std::int64_t time_ns, const core::HealthTable& health) {
    publisher_.send(Topic::health, proto::encode_health(
                                       {{stream_id_, next_.health++}, time_ns, ride_height_names_, health}));
}

}  // namespace holdfast::commands
