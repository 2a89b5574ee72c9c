// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <limits>

#include "tests/node/fake_time.hpp"

namespace holdfast::node {
namespace {

using testing::FakeTime;
using testing::kFakeStart_ns;

TEST_CASE("frames are due by an absolute schedule: work between them does not add up") {
    FakeTime time;
    Pacer pacer(1.0, time);
    const std::int64_t begin_ns = 5'000'000'000;  // a log need not begin at 0
    CHECK(pacer.wait_for(begin_ns));
    for (int i = 1; i <= 3; ++i) {
        time.work(2'000'000);
        CHECK(pacer.wait_for(begin_ns + i * 10'000'000));
    }
    CHECK(time.slept_until_ns == std::vector<std::int64_t>{kFakeStart_ns + 10'000'000,
                                                           kFakeStart_ns + 20'000'000,
                                                           kFakeStart_ns + 30'000'000});
    CHECK(pacer.worst_lateness_ns() == 0);
    CHECK(pacer.slips() == 0);
}

TEST_CASE("a pace lays more source time on the same clock time") {
    FakeTime time;
    Pacer pacer(20.0, time);
    CHECK(pacer.wait_for(0));
    CHECK(pacer.wait_for(1'000'000'000));
    CHECK(time.slept_until_ns == std::vector<std::int64_t>{kFakeStart_ns + 50'000'000});
}

TEST_CASE("at pace 0 nothing is waited for") {
    FakeTime time;
    Pacer pacer(0.0, time);
    CHECK(pacer.wait_for(0));
    CHECK(pacer.wait_for(std::numeric_limits<std::int64_t>::max()));
    CHECK(time.slept_until_ns.empty());
}

TEST_CASE("who is late sends at once, and the worst lateness and the slips are kept") {
    FakeTime time;
    Pacer pacer(1.0, time);
    CHECK(pacer.wait_for(0));
    time.work(13'000'000);
    CHECK(pacer.wait_for(1'000'000));
    CHECK(pacer.wait_for(2'500'000));
    CHECK(pacer.wait_for(5'000'000));
    CHECK(time.slept_until_ns.empty());
    CHECK(pacer.worst_lateness_ns() == 12'000'000);
    CHECK(pacer.slips() == 2);  // 12 and 10.5 ms; 8 ms is none
}

TEST_CASE("a sleep that ends early is told, and the frame is still due at its time") {
    FakeTime time;
    Pacer pacer(1.0, time);
    CHECK(pacer.wait_for(0));
    time.wakes_early_ns = 1;
    CHECK_FALSE(pacer.wait_for(10));
    CHECK(pacer.wait_for(10));
    CHECK(time.slept_until_ns == std::vector<std::int64_t>{kFakeStart_ns + 10, kFakeStart_ns + 10});
}

TEST_CASE("times that run backwards or lie absurdly far apart are within the clock's range") {
    FakeTime time;
    Pacer pacer(0.001, time);
    CHECK(pacer.wait_for(0));
    CHECK(pacer.wait_for(std::numeric_limits<std::int64_t>::min()));
    CHECK(time.slept_until_ns.empty());
    CHECK(pacer.wait_for(std::numeric_limits<std::int64_t>::max()));
    REQUIRE(time.slept_until_ns.size() == 1);
    CHECK(time.slept_until_ns[0] > kFakeStart_ns);
}

TEST_CASE("the real clock sleeps until the time that it is told") {
    SteadyTime time;
    const std::int64_t until_ns = time.now_ns() + 2'000'000;
    time.sleep_until_ns(until_ns);
    CHECK(time.now_ns() >= until_ns);
}

}  // namespace
}  // namespace holdfast::node
