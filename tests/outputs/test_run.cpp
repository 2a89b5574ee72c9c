// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>

#include "estimator/outputs/folder.hpp"
#include "estimator/outputs/run.hpp"
#include "tests/core/small_car.hpp"
#include "tests/outputs/examples.hpp"

using namespace holdfast;

namespace {

constexpr std::int64_t kFramePeriodNs = 2'500'000;  // 400 Hz

struct Listener : outputs::Sink {
    std::vector<std::int64_t> estimate_times_ns;
    std::vector<std::int64_t> health_times_ns;
    std::vector<outputs::RunEnd> ends;

    void on_estimate(const core::Estimate& e) override { estimate_times_ns.push_back(e.time_ns); }
    void on_health(std::int64_t time_ns, const core::HealthTable&) override {
        health_times_ns.push_back(time_ns);
    }
    void on_end(const outputs::RunEnd& end) override { ends.push_back(end); }
};

Frame frame_at(std::int64_t time_ns) {
    Frame frame;
    frame.time_ns = time_ns;
    frame.set(Channel::speed, 30.0);
    return frame;
}

}  // namespace

TEST_CASE("estimates come at the rate, on a grid that starts at source time 0") {
    Listener listener;
    outputs::Run run(testing::small_car(), {}, 50.0, {&listener});
    const std::int64_t joined_ns = 1'003'000'000;  // off the grid
    for (int i = 0; i < 400; ++i) run.step(frame_at(joined_ns + i * kFramePeriodNs));
    run.finish(true);

    const auto& times = listener.estimate_times_ns;
    REQUIRE(times.size() == 50 + 1);  // the first frame's, then one a period
    CHECK(times[0] == joined_ns);
    for (std::size_t i = 1; i < times.size(); ++i) {
        CHECK(times[i] % 20'000'000 < kFramePeriodNs);
        CHECK(times[i] - times[i - 1] <= 20'000'000 + kFramePeriodNs);
    }
}

TEST_CASE("a pause in the frames is not filled with estimates") {
    Listener listener;
    outputs::Run run(testing::small_car(), {}, 50.0, {&listener});
    run.step(frame_at(0));
    run.step(frame_at(10'000'000'000));
    run.step(frame_at(10'000'000'000 + kFramePeriodNs));
    run.finish(true);
    CHECK(listener.estimate_times_ns == std::vector<std::int64_t>{0, 10'000'000'000});
}

TEST_CASE("frames that repeat or run backwards are counted and left out") {
    Listener listener;
    outputs::Run run(testing::small_car(), {}, 50.0, {&listener});
    for (const std::int64_t time_ms : {0, 20, 20, 10, 40}) run.step(frame_at(time_ms * 1'000'000));
    run.finish(false, "broke off");

    REQUIRE(listener.ends.size() == 1);
    const outputs::RunEnd& end = listener.ends.front();
    CHECK(end.frames == 3);
    CHECK(end.repeated == 1);
    CHECK(end.out_of_order == 1);
    CHECK(end.duration_s == Approx(0.04));
    CHECK_FALSE(end.complete);
    CHECK(end.reason == "broke off");
    CHECK(listener.estimate_times_ns.size() == 3);
}

TEST_CASE("health is told once a second and at the end") {
    Listener listener;
    outputs::Run run(testing::small_car(), {}, 50.0, {&listener});
    for (int i = 0; i <= 1000; ++i) run.step(frame_at(i * kFramePeriodNs));  // 2.5 s
    run.finish(true);
    CHECK(listener.health_times_ns ==
          std::vector<std::int64_t>{0, 1'000'000'000, 2'000'000'000, 2'500'000'000});
}

TEST_CASE("the same frames give the same files, however the run is fed") {
    const testing::TempFolder one;
    const testing::TempFolder two;
    for (const testing::TempFolder* folder : {&one, &two}) {
        outputs::Folder files(folder->path(), {.flap_chord_m = 0.24, .rate_hz = 50.0});
        outputs::Run run(testing::small_car(), {}, 50.0, {&files});
        for (int i = 0; i < 2000; ++i) run.step(frame_at(i * kFramePeriodNs));
        run.finish(true);
    }
    for (const char* name : {"closures.csv", "estimates.csv", "zones.csv", "summary.json"}) {
        INFO(name);
        CHECK(examples::read(one / name) == examples::read(two / name));
    }
}
