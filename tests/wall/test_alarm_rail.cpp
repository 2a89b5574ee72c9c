// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>

#include "estimator/wall/alarm_rail.hpp"
#include "tests/wall/examples.hpp"

using namespace holdfast;
using core::AlarmKind;
using wall::AlarmRail;

namespace {

constexpr std::int64_t kSecond = 1'000'000'000;

core::Alarm at(double time_s, AlarmKind kind, std::uint32_t closure = 0, Channel channel = Channel::speed) {
    core::Alarm alarm = examples::alarm(kind, closure);
    alarm.time_ns = static_cast<std::int64_t>(time_s * 1e9);
    alarm.channel = channel;
    return alarm;
}

core::HealthTable health_with(Channel channel, core::Trust trust) {
    core::HealthTable table{};
    table[index(channel)].trust = trust;
    return table;
}

// Alarms put up so far: ids seen in the changes.
std::uint32_t newest_id(AlarmRail& rail) {
    std::uint32_t newest = 0;
    for (const AlarmRail::Change& change : rail.take_changes()) newest = std::max(newest, change.alarm.id);
    return newest;
}

}  // namespace

TEST_CASE("an alarm stands until a person has acknowledged it, though its condition has gone") {
    AlarmRail rail;
    rail.raise(at(10.0, AlarmKind::short_at_brakes, 4));
    rail.see_closure(examples::closure(5));  // judged and not short
    REQUIRE(rail.standing().size() == 1);
    CHECK_FALSE(rail.standing()[0].active);
    CHECK_FALSE(rail.standing()[0].acknowledged);
    CHECK(rail.acknowledge(1, 1.7e9));
    CHECK(rail.standing().empty());
    CHECK_FALSE(rail.acknowledge(1, 1.7e9));  // once is enough
}

TEST_CASE("an acknowledged alarm stands while its condition holds") {
    AlarmRail rail;
    rail.raise(at(10.0, AlarmKind::short_at_brakes, 4));
    CHECK(rail.acknowledge(1, 1.7e9));
    REQUIRE(rail.standing().size() == 1);
    CHECK(rail.standing()[0].acknowledged);
    CHECK(rail.standing()[0].acknowledged_by_s == 1.7e9);
    rail.see_closure(examples::closure(5));
    CHECK(rail.standing().empty());
}

TEST_CASE("what nobody raised cannot be acknowledged") {
    AlarmRail rail;
    CHECK_FALSE(rail.acknowledge(1, 0.0));
    CHECK(rail.take_changes().empty());
}

TEST_CASE("a sensor that is trusted again within the on-delay raises nothing") {
    AlarmRail rail;
    rail.raise(at(10.0, AlarmKind::sensor_distrusted, 0, Channel::load_fl));
    rail.see_health(10 * kSecond + kSecond / 2, health_with(Channel::load_fl, core::Trust::good));
    rail.see_health(12 * kSecond, health_with(Channel::load_fl, core::Trust::good));
    CHECK(rail.standing().empty());
    CHECK(rail.take_changes().empty());
}

TEST_CASE("a sensor that stays distrusted is an alarm after the on-delay") {
    AlarmRail rail;
    const auto bad = health_with(Channel::load_fl, core::Trust::distrusted);
    rail.raise(at(10.0, AlarmKind::sensor_distrusted, 0, Channel::load_fl));
    rail.see_health(10 * kSecond + kSecond / 2, bad);
    CHECK(rail.standing().empty());
    rail.see_health(11 * kSecond, bad);
    REQUIRE(rail.standing().size() == 1);
    CHECK(rail.standing()[0].alarm.time_ns == 10 * kSecond);  // since when it has been so
}

TEST_CASE("a chattering sensor is one alarm") {
    AlarmRail rail;
    const auto bad = health_with(Channel::load_fl, core::Trust::distrusted);
    const auto good = health_with(Channel::load_fl, core::Trust::good);
    for (int i = 0; i < 100; ++i) {  // two seconds bad, two seconds good, for six minutes and more
        const std::int64_t t = i * 4 * kSecond;
        core::Alarm alarm = at(0.0, AlarmKind::sensor_distrusted, 0, Channel::load_fl);
        alarm.time_ns = t;
        rail.raise(alarm);
        rail.see_health(t + 2 * kSecond, bad);
        rail.see_health(t + 3 * kSecond, good);
        if (i == 50) CHECK(rail.acknowledge(1, 1.7e9));  // acknowledging it does not start it anew
    }
    CHECK(newest_id(rail) == 1);
    CHECK(rail.standing().size() == 1);
}

TEST_CASE("a condition has gone once it has stayed away for the off-delay; the next one is a new alarm") {
    AlarmRail rail;
    rail.raise(at(10.0, AlarmKind::data_stale));
    CHECK(rail.acknowledge(1, 1.7e9));
    rail.see_data(11 * kSecond, false);
    rail.see_data(20 * kSecond, false);
    CHECK(rail.standing().size() == 1);
    rail.see_data(21 * kSecond, false);
    CHECK(rail.standing().empty());
    rail.raise(at(30.0, AlarmKind::data_stale));
    REQUIRE(rail.standing().size() == 1);
    CHECK(rail.standing()[0].id == 2);
}

TEST_CASE("stale data of several channels are one alarm") {
    AlarmRail rail;
    rail.raise(at(10.0, AlarmKind::data_stale, 0, Channel::load_fl));
    rail.raise(at(10.0, AlarmKind::data_stale, 0, Channel::speed));
    CHECK(rail.standing().size() == 1);
}

TEST_CASE("each closing short at the brakes is an alarm of its own; slow ones gather in one") {
    AlarmRail rail;
    rail.raise(at(10.0, AlarmKind::short_at_brakes, 1));
    rail.raise(at(40.0, AlarmKind::short_at_brakes, 2));
    rail.raise(at(70.0, AlarmKind::slow_reattachment, 3));
    rail.raise(at(99.0, AlarmKind::slow_reattachment, 4));
    const auto standing = rail.standing();
    REQUIRE(standing.size() == 3);
    CHECK(standing[0].alarm.kind == AlarmKind::slow_reattachment);
    CHECK(standing[0].times == 2);
    CHECK(standing[0].last_closure == 4);
}

TEST_CASE("within the dead band a closing does not end the one before") {
    AlarmRail rail;
    rail.raise(at(10.0, AlarmKind::short_at_brakes, 1));
    core::Closure doubtful = examples::closure(2);
    doubtful.probability_short = 0.7;  // below the alarm's limit of 0.9, above the dead band's end
    rail.see_closure(doubtful);
    CHECK(rail.standing()[0].active);
    core::Closure unknown = examples::closure(3);
    unknown.reattachment_known = false;
    rail.see_closure(unknown);
    CHECK(rail.standing()[0].active);
    rail.see_closure(examples::closure(4));
    CHECK_FALSE(rail.standing()[0].active);
}

TEST_CASE("a closing's own record does not end its alarm") {
    AlarmRail rail;
    rail.raise(at(10.0, AlarmKind::slow_reattachment, 5));
    rail.see_closure(examples::closure(5));
    CHECK(rail.standing()[0].active);
}

TEST_CASE("the first alarm of a burst is on top, a later burst above it") {
    AlarmRail rail;
    rail.raise(at(10.0, AlarmKind::data_stale));
    rail.raise(at(11.0, AlarmKind::unknown_at_brakes, 1));
    rail.raise(at(12.0, AlarmKind::short_at_brakes, 2));
    rail.raise(at(60.0, AlarmKind::short_at_brakes, 3));
    std::vector<std::uint32_t> ids, bursts;
    for (const wall::RailAlarm& alarm : rail.standing()) {
        ids.push_back(alarm.id);
        bursts.push_back(alarm.burst);
    }
    CHECK(ids == std::vector<std::uint32_t>{4, 1, 2, 3});
    CHECK(bursts == std::vector<std::uint32_t>{4, 1, 1, 1});
}

TEST_CASE("when the node starts anew, what nobody has acknowledged stays, and its condition is over") {
    AlarmRail rail;
    rail.raise(at(500.0, AlarmKind::short_at_brakes, 1));
    rail.raise(at(520.0, AlarmKind::short_at_brakes, 2));
    CHECK(rail.acknowledge(2, 1.7e9));
    rail.begin_stream(2);
    REQUIRE(rail.standing().size() == 1);
    CHECK(rail.standing()[0].id == 1);
    CHECK_FALSE(rail.standing()[0].active);
    rail.raise(at(5.0, AlarmKind::short_at_brakes, 1));  // closings count from 1 again: another one
    CHECK(rail.standing().size() == 2);
}

TEST_CASE("short at the brakes is of high severity, slow of low, what is unknown lies between") {
    CHECK(wall::severity_of(AlarmKind::short_at_brakes) == wall::Severity::high);
    CHECK(wall::severity_of(AlarmKind::slow_reattachment) == wall::Severity::low);
    for (const AlarmKind kind :
         {AlarmKind::unknown_at_brakes, AlarmKind::data_stale, AlarmKind::sensor_distrusted})
        CHECK(wall::severity_of(kind) == wall::Severity::medium);
}
