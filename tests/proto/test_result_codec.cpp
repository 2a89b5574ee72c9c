// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <cstring>

#include "proto/result_codec.hpp"

namespace holdfast::proto {
namespace {

// Distinct values for the fields, so that two that are swapped are noticed.
class Counter {
  public:
    operator double() { return ++last_ + 0.25; }  // NOLINT(google-explicit-constructor)
    operator std::uint64_t() {
        return static_cast<std::uint64_t>(++last_);
    }  // NOLINT(google-explicit-constructor)
    core::Quantity quantity() {
        const double value = *this;
        return {value, *this};
    }

  private:
    double last_ = 0;
};

bool same(const core::Quantity& a, const core::Quantity& b) {
    return a.value == b.value && a.sd == b.sd;
}

TEST_CASE("an estimate comes back whole") {
    Counter next;
    const EstimateMessage sent{{5, 6},
                               {.time_ns = -7,
                                .flags = core::kStale | core::kSensorDistrusted,
                                .speed_mps = next,
                                .air_speed_mps = next,
                                .air_density_kgpm3 = next,
                                .cla_front_m2 = next.quantity(),
                                .cla_rear_m2 = next.quantity(),
                                .cda_m2 = next.quantity(),
                                .attached = next.quantity(),
                                .downforce_front_n = next.quantity(),
                                .downforce_rear_n = next.quantity(),
                                .drag_n = next.quantity(),
                                .flap_area_m2 = next.quantity()}};
    const auto back = decode_estimate(encode_estimate(sent));
    REQUIRE(back);
    CHECK(back->id == sent.id);
    const core::Estimate& a = sent.estimate;
    const core::Estimate& b = back->estimate;
    CHECK(b.time_ns == a.time_ns);
    CHECK(b.flags == a.flags);
    CHECK(b.speed_mps == a.speed_mps);
    CHECK(b.air_speed_mps == a.air_speed_mps);
    CHECK(b.air_density_kgpm3 == a.air_density_kgpm3);
    CHECK(same(b.cla_front_m2, a.cla_front_m2));
    CHECK(same(b.cla_rear_m2, a.cla_rear_m2));
    CHECK(same(b.cda_m2, a.cda_m2));
    CHECK(same(b.attached, a.attached));
    CHECK(same(b.downforce_front_n, a.downforce_front_n));
    CHECK(same(b.downforce_rear_n, a.downforce_rear_n));
    CHECK(same(b.drag_n, a.drag_n));
    CHECK(same(b.flap_area_m2, a.flap_area_m2));
}

TEST_CASE("a closure comes back whole, each verdict as itself") {
    Counter next;
    const auto verdict = GENERATE(core::Verdict::full, core::Verdict::short_of, core::Verdict::unclear);
    const bool yes = GENERATE(false, true);
    const core::Closure a{.number = 3,
                          .lap = -1,
                          .zone = 4,
                          .time_command_s = next,
                          .time_closed_s = next,
                          .speed_mps = next,
                          .closing_time_s = next,
                          .lap_distance_brake_m = next,
                          .reattachment_known = yes,
                          .tau_s = next.quantity(),
                          .t95_s = next,
                          .t95_low_s = next,
                          .t95_high_s = next,
                          .plateau = next,
                          .whole = !yes,
                          .braked = yes,
                          .time_brake_s = next,
                          .margin_s = next.quantity(),
                          .shortfall_n = next.quantity(),
                          .shortfall_share = next,
                          .probability_short = next,
                          .probability_slow = next,
                          .usual_known = !yes,
                          .slow = yes,
                          .verdict = verdict,
                          .flap_downforce_n = next};
    const auto back = decode_closure(encode_closure({{1, 2}, a}));
    REQUIRE(back);
    const core::Closure& b = back->closure;
    CHECK(back->id == MessageId{1, 2});
    CHECK(b.number == a.number);
    CHECK(b.lap == a.lap);
    CHECK(b.zone == a.zone);
    CHECK(b.time_command_s == a.time_command_s);
    CHECK(b.time_closed_s == a.time_closed_s);
    CHECK(b.speed_mps == a.speed_mps);
    CHECK(b.closing_time_s == a.closing_time_s);
    CHECK(b.lap_distance_brake_m == a.lap_distance_brake_m);
    CHECK(b.reattachment_known == a.reattachment_known);
    CHECK(same(b.tau_s, a.tau_s));
    CHECK(b.t95_s == a.t95_s);
    CHECK(b.t95_low_s == a.t95_low_s);
    CHECK(b.t95_high_s == a.t95_high_s);
    CHECK(b.plateau == a.plateau);
    CHECK(b.whole == a.whole);
    CHECK(b.braked == a.braked);
    CHECK(b.time_brake_s == a.time_brake_s);
    CHECK(same(b.margin_s, a.margin_s));
    CHECK(same(b.shortfall_n, a.shortfall_n));
    CHECK(b.shortfall_share == a.shortfall_share);
    CHECK(b.probability_short == a.probability_short);
    CHECK(b.probability_slow == a.probability_slow);
    CHECK(b.usual_known == a.usual_known);
    CHECK(b.slow == a.slow);
    CHECK(b.verdict == a.verdict);
    CHECK(b.flap_downforce_n == a.flap_downforce_n);
}

TEST_CASE("an alarm comes back whole, each kind as itself") {
    const auto kind = GENERATE(core::AlarmKind::short_at_brakes, core::AlarmKind::unknown_at_brakes,
                               core::AlarmKind::slow_reattachment, core::AlarmKind::data_stale,
                               core::AlarmKind::sensor_distrusted);
    const auto channel = GENERATE(Channel::speed, Channel::relative_humidity, ride_height_channel(2));
    const std::vector<std::string> names{"front", "rear_left", "rear_right"};
    const AlarmMessage sent{{8, 9},
                            {.kind = kind,
                             .time_ns = 11,
                             .closure = 12,
                             .channel = channel,
                             .probability = 0.5,
                             .shortfall_n = {13, 14}},
                            channel_name(channel, names)};
    const auto back = decode_alarm(encode_alarm(sent));
    REQUIRE(back);
    CHECK(back->id == sent.id);
    CHECK(back->alarm.kind == kind);
    CHECK(back->alarm.time_ns == 11);
    CHECK(back->alarm.closure == 12);
    CHECK(back->alarm.channel == channel);
    CHECK(back->alarm.probability == 0.5);
    CHECK(same(back->alarm.shortfall_n, sent.alarm.shortfall_n));
    CHECK(back->channel_name == sent.channel_name);
}

TEST_CASE("health comes back whole, channel by channel") {
    Counter next;
    HealthMessage sent{.id = {1, 2}, .time_ns = 3, .ride_height_names = {"front", "rear"}, .health = {}};
    const std::size_t count = index(Channel::ride_height_0) + 2;
    for (std::size_t i = 0; i < count; ++i)
        sent.health[i] = {.samples = next,
                          .gaps = next,
                          .repeats = next,
                          .not_finite = next,
                          .out_of_range = next,
                          .gated = next,
                          .interval_s = next,
                          .last_time_ns = -4,
                          .last_value = next,
                          .trust = static_cast<core::Trust>(i % 3),
                          .fault = static_cast<core::Fault>(i % 7),
                          .since_ns = 5,
                          .status = {.time_ns = 6,
                                     .value = next,
                                     .predicted = next,
                                     .innovation = next,
                                     .innovation_variance = next,
                                     .test_ratio = next,
                                     .result = static_cast<core::FusionResult>(i % 7)}};
    const auto back = decode_health(encode_health(sent));
    REQUIRE(back);
    CHECK(back->id == sent.id);
    CHECK(back->time_ns == 3);
    CHECK(back->ride_height_names == sent.ride_height_names);
    for (std::size_t i = 0; i < kChannelCount; ++i) {
        INFO(channel_name(static_cast<Channel>(i), sent.ride_height_names));
        const core::ChannelHealth& a = sent.health[i];
        const core::ChannelHealth& b = back->health[i];
        CHECK(b.samples == a.samples);
        CHECK(b.gaps == a.gaps);
        CHECK(b.repeats == a.repeats);
        CHECK(b.not_finite == a.not_finite);
        CHECK(b.out_of_range == a.out_of_range);
        CHECK(b.gated == a.gated);
        CHECK(b.interval_s == a.interval_s);
        CHECK(b.last_time_ns == a.last_time_ns);
        CHECK(b.last_value == a.last_value);
        CHECK(b.trust == a.trust);
        CHECK(b.fault == a.fault);
        CHECK(b.since_ns == a.since_ns);
        CHECK(b.status.time_ns == a.status.time_ns);
        CHECK(b.status.value == a.status.value);
        CHECK(b.status.predicted == a.status.predicted);
        CHECK(b.status.innovation == a.status.innovation);
        CHECK(b.status.innovation_variance == a.status.innovation_variance);
        CHECK(b.status.test_ratio == a.status.test_ratio);
        CHECK(b.status.result == a.status.result);
    }
}

TEST_CASE("an enumerator of a newer program is refused by its number") {
    std::string bytes = encode_alarm({{1, 2}, {}, "speed"});
    bytes += "\x10\x63";  // 2: kind = 99; of a field that comes twice the last one counts
    const auto back = decode_alarm(bytes);
    REQUIRE_FALSE(back);
    CHECK_THAT(back.error().message, Catch::Contains("kind 99"));
}

}  // namespace
}  // namespace holdfast::proto
