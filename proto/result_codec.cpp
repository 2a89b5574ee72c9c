// SPDX-License-Identifier: MIT
#include "proto/result_codec.hpp"

#include <algorithm>
#include <optional>

#include "holdfast.pb.h"

namespace holdfast::proto {
namespace {


void put(const MessageId& id, wire::Id& into) {
    into.set_stream_id(id.stream_id);
    into.set_sequence(id.sequence);
}
MessageId get(const wire::Id& from) {
    return {from.stream_id(), from.sequence()};
}

void put(const core::Quantity& quantity, wire::Quantity& into) {
    into.set_value(quantity.value);
    into.set_sd(quantity.sd);
}
core::Quantity get(const wire::Quantity& from) {
    return {from.value(), from.sd()};
}

void put(Channel channel, const std::string& name, wire::ChannelRef& into) {
    into.set_name(name);
    if (is_ride_height(channel))
        into.set_ride_height_slot(static_cast<std::uint32_t>(index(channel) - index(Channel::ride_height_0)));
}
std::optional<Channel> get(const wire::ChannelRef& from) {
    if (from.name().starts_with(kRideHeightPrefix)) {
        if (from.ride_height_slot() >= kMaxRideHeights) return std::nullopt;
        return ride_height_channel(from.ride_height_slot());
    }
    for (std::size_t i = 0; i < kChannelInfo.size(); ++i)
        if (kChannelInfo[i].name == from.name()) return static_cast<Channel>(i);
    return std::nullopt;
}

// Enumerators run in the same order on both sides; wire enums whose 0 is "unspecified" begin one later.
template <class Wire, class Core>
Wire to_wire(Core value, int first) {
    return static_cast<Wire>(static_cast<int>(value) + first);
}
template <class Core>
std::optional<Core> to_core(int value, int first, Core last) {
    if (value < first || value - first > static_cast<int>(last)) return std::nullopt;
    return static_cast<Core>(value - first);
}

Error unsound(std::string_view what, const std::string& why) {
    return {.message = "no sound " + std::string(what) + " message: " + why};
}
Error unknown(std::string_view what, std::string_view field, int value) {
    return unsound(what, std::string(field) + " " + std::to_string(value) + " is not known to this program");
}

template <class Message>
std::optional<Error> parse(std::string_view what, std::string_view bytes, Message& message) {
    if (bytes.size() > kMaxMessageBytes ||
        !message.ParseFromArray(bytes.data(), static_cast<int>(bytes.size())) || !message.has_id())
        return unsound(what, "the bytes do not follow the schema");
    return std::nullopt;
}

void put(const core::ChannelHealth& health, wire::ChannelHealth& into) {
    into.set_samples(health.samples);
    into.set_gaps(health.gaps);
    into.set_repeats(health.repeats);
    into.set_not_finite(health.not_finite);
    into.set_out_of_range(health.out_of_range);
    into.set_gated(health.gated);
    into.set_interval_s(health.interval_s);
    into.set_last_time_ns(health.last_time_ns);
    into.set_last_value(health.last_value);
    into.set_trust(to_wire<wire::Trust>(health.trust, 0));
    into.set_fault(to_wire<wire::Fault>(health.fault, 0));
    into.set_since_ns(health.since_ns);
    into.set_measurement_time_ns(health.status.time_ns);
    into.set_measured(health.status.value);
    into.set_predicted(health.status.predicted);
    into.set_innovation(health.status.innovation);
    into.set_innovation_variance(health.status.innovation_variance);
    into.set_test_ratio(health.status.test_ratio);
    into.set_result(to_wire<wire::FusionResult>(health.status.result, 0));
}

std::optional<Error> get(const wire::ChannelHealth& from, core::ChannelHealth& into) {
    const auto trust = to_core(from.trust(), 0, core::Trust::distrusted);
    const auto fault = to_core(from.fault(), 0, core::Fault::disagrees);
    const auto result = to_core(from.result(), 0, core::FusionResult::distrusted);
    if (!trust) return unknown("health", "trust", from.trust());
    if (!fault) return unknown("health", "fault", from.fault());
    if (!result) return unknown("health", "result", from.result());
    into = {.samples = from.samples(),
            .gaps = from.gaps(),
            .repeats = from.repeats(),
            .not_finite = from.not_finite(),
            .out_of_range = from.out_of_range(),
            .gated = from.gated(),
            .interval_s = from.interval_s(),
            .last_time_ns = from.last_time_ns(),
            .last_value = from.last_value(),
            .trust = *trust,
            .fault = *fault,
            .since_ns = from.since_ns(),
            .status = {.time_ns = from.measurement_time_ns(),
                       .value = from.measured(),
                       .predicted = from.predicted(),
                       .innovation = from.innovation(),
                       .innovation_variance = from.innovation_variance(),
                       .test_ratio = from.test_ratio(),
                       .result = *result}};
    return std::nullopt;
}

}  // namespace

std::string encode_estimate(const EstimateMessage& message) {
    const core::Estimate& estimate = message.estimate;
    wire::EstimateMsg out;
    put(message.id, *out.mutable_id());
    out.set_time_ns(estimate.time_ns);
    out.set_flags(estimate.flags);
    out.set_speed_mps(estimate.speed_mps);
    out.set_air_speed_mps(estimate.air_speed_mps);
    out.set_air_density_kgpm3(estimate.air_density_kgpm3);
    put(estimate.cla_front_m2, *out.mutable_cla_front_m2());
    put(estimate.cla_rear_m2, *out.mutable_cla_rear_m2());
    put(estimate.cda_m2, *out.mutable_cda_m2());
    put(estimate.attached, *out.mutable_attached());
    put(estimate.downforce_front_n, *out.mutable_downforce_front_n());
    put(estimate.downforce_rear_n, *out.mutable_downforce_rear_n());
    put(estimate.drag_n, *out.mutable_drag_n());
    put(estimate.flap_area_m2, *out.mutable_flap_area_m2());
    return out.SerializeAsString();
}

Result<EstimateMessage> decode_estimate(std::string_view bytes) {
    wire::EstimateMsg in;
    if (auto error = parse("estimate", bytes, in)) return *error;
    return EstimateMessage{get(in.id()),
                           {.time_ns = in.time_ns(),
                            .flags = in.flags(),
                            .speed_mps = in.speed_mps(),
                            .air_speed_mps = in.air_speed_mps(),
                            .air_density_kgpm3 = in.air_density_kgpm3(),
                            .cla_front_m2 = get(in.cla_front_m2()),
                            .cla_rear_m2 = get(in.cla_rear_m2()),
                            .cda_m2 = get(in.cda_m2()),
                            .attached = get(in.attached()),
                            .downforce_front_n = get(in.downforce_front_n()),
                            .downforce_rear_n = get(in.downforce_rear_n()),
                            .drag_n = get(in.drag_n()),
                            .flap_area_m2 = get(in.flap_area_m2())}};
}

std::string encode_closure(const ClosureMessage& message) {
    const core::Closure& closure = message.closure;
    wire::ClosureMsg out;
    put(message.id, *out.mutable_id());
    out.set_number(closure.number);
    out.set_lap(closure.lap);
    out.set_zone(closure.zone);
    out.set_time_command_s(closure.time_command_s);
    out.set_time_closed_s(closure.time_closed_s);
    out.set_speed_mps(closure.speed_mps);
    out.set_closing_time_s(closure.closing_time_s);
    out.set_lap_distance_brake_m(closure.lap_distance_brake_m);
    out.set_reattachment_known(closure.reattachment_known);
    put(closure.tau_s, *out.mutable_tau_s());
    out.set_t95_s(closure.t95_s);
    out.set_t95_low_s(closure.t95_low_s);
    out.set_t95_high_s(closure.t95_high_s);
    out.set_plateau(closure.plateau);
    out.set_whole(closure.whole);
    out.set_braked(closure.braked);
    out.set_time_brake_s(closure.time_brake_s);
    put(closure.margin_s, *out.mutable_margin_s());
    put(closure.shortfall_n, *out.mutable_shortfall_n());
    out.set_shortfall_share(closure.shortfall_share);
    out.set_probability_short(closure.probability_short);
    out.set_probability_slow(closure.probability_slow);
    out.set_usual_known(closure.usual_known);
    out.set_slow(closure.slow);
    out.set_verdict(to_wire<wire::Verdict>(closure.verdict, wire::VERDICT_FULL));
    out.set_flap_downforce_n(closure.flap_downforce_n);
    return out.SerializeAsString();
}

Result<ClosureMessage> decode_closure(std::string_view bytes) {
    wire::ClosureMsg in;
    if (auto error = parse("closure", bytes, in)) return *error;
    const auto verdict = to_core(in.verdict(), wire::VERDICT_FULL, core::Verdict::unclear);
    if (!verdict) return unknown("closure", "verdict", in.verdict());
    return ClosureMessage{get(in.id()),
                          {.number = in.number(),
                           .lap = in.lap(),
                           .zone = in.zone(),
                           .time_command_s = in.time_command_s(),
                           .time_closed_s = in.time_closed_s(),
                           .speed_mps = in.speed_mps(),
                           .closing_time_s = in.closing_time_s(),
                           .lap_distance_brake_m = in.lap_distance_brake_m(),
                           .reattachment_known = in.reattachment_known(),
                           .tau_s = get(in.tau_s()),
                           .t95_s = in.t95_s(),
                           .t95_low_s = in.t95_low_s(),
                           .t95_high_s = in.t95_high_s(),
                           .plateau = in.plateau(),
                           .whole = in.whole(),
                           .braked = in.braked(),
                           .time_brake_s = in.time_brake_s(),
                           .margin_s = get(in.margin_s()),
                           .shortfall_n = get(in.shortfall_n()),
                           .shortfall_share = in.shortfall_share(),
                           .probability_short = in.probability_short(),
                           .probability_slow = in.probability_slow(),
                           .usual_known = in.usual_known(),
                           .slow = in.slow(),
                           .verdict = *verdict,
                           .flap_downforce_n = in.flap_downforce_n()}};
}

std::string encode_alarm(const AlarmMessage& message) {
    const core::Alarm& alarm = message.alarm;
    wire::AlarmMsg out;
    put(message.id, *out.mutable_id());
    out.set_kind(to_wire<wire::AlarmKind>(alarm.kind, wire::ALARM_KIND_SHORT_AT_BRAKES));
    out.set_time_ns(alarm.time_ns);
    out.set_closure(alarm.closure);
    put(alarm.channel, message.channel_name, *out.mutable_channel());
    out.set_probability(alarm.probability);
    put(alarm.shortfall_n, *out.mutable_shortfall_n());
    return out.SerializeAsString();
}

Result<AlarmMessage> decode_alarm(std::string_view bytes) {
    wire::AlarmMsg in;
    if (auto error = parse("alarm", bytes, in)) return *error;
    const auto kind =
        to_core(in.kind(), wire::ALARM_KIND_SHORT_AT_BRAKES, core::AlarmKind::sensor_distrusted);
    const auto channel = in.has_channel() ? get(in.channel()) : Channel::speed;
    if (!kind) return unknown("alarm", "kind", in.kind());
    if (!channel)
        return unsound("alarm", "channel \"" + in.channel().name() + "\" is not known to this program");
    return AlarmMessage{get(in.id()),
                        {.kind = *kind,
                         .time_ns = in.time_ns(),
                         .closure = in.closure(),
                         .channel = *channel,
                         .probability = in.probability(),
                         .shortfall_n = get(in.shortfall_n())},
                        in.channel().name()};
}

std::string encode_health(const HealthMessage& message) {
    wire::HealthMsg out;
    put(message.id, *out.mutable_id());
    out.set_time_ns(message.time_ns);
    const std::size_t named = std::min(message.ride_height_names.size(), kMaxRideHeights);
    for (std::size_t i = 0; i < index(Channel::ride_height_0) + named; ++i) {
        const auto channel = static_cast<Channel>(i);
        wire::ChannelHealth& health = *out.add_channel();
        put(channel, channel_name(channel, message.ride_height_names), *health.mutable_channel());
        put(message.health[i], health);
    }
    return out.SerializeAsString();
}

Result<HealthMessage> decode_health(std::string_view bytes) {
    wire::HealthMsg in;
    if (auto error = parse("health", bytes, in)) return *error;
    HealthMessage out{.id = get(in.id()), .time_ns = in.time_ns(), .ride_height_names = {}, .health = {}};
    for (const wire::ChannelHealth& health : in.channel()) {
        const auto channel = get(health.channel());
        if (!channel) continue;  // a newer program's channel
        if (auto error = get(health, out.health[index(*channel)])) return *error;
        if (!is_ride_height(*channel)) continue;
        const std::size_t slot = health.channel().ride_height_slot();
        if (out.ride_height_names.size() <= slot) out.ride_height_names.resize(slot + 1);
        out.ride_height_names[slot] = health.channel().name().substr(kRideHeightPrefix.size());
    }
    return out;
}

}  // namespace holdfast::proto
