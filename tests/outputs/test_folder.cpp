// SPDX-License-Identifier: MIT
#include <algorithm>
#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>

#include "estimator/outputs/folder.hpp"
#include "tests/outputs/examples.hpp"

using namespace holdfast;
using examples::known_closure;
using nlohmann::json;

namespace {

outputs::Outing outing() {
    return {.log = "outing.csv",
            .car_name = "Car 12",
            .car_file = "car.toml",
            .flap_chord_m = 0.24,
            .rate_hz = 50.0,
            .stream = {.ride_height_names = {"front"},
                       .channels = std::uint64_t{1} << index(Channel::accel_x),
                       .origin = {}}};
}

core::Estimate fast_estimate(std::int64_t time_ns) {
    core::Estimate e;
    e.time_ns = time_ns;
    e.flags = core::kGroundReference;
    e.speed_mps = 80.0;
    e.attached = {1.0, 0.01};
    e.cla_front_m2 = {1.7, 0.05};
    e.cla_rear_m2 = {2.4, 0.06};
    e.cda_m2 = {1.3, 0.07};
    return e;
}

json summary_of(const testing::TempFolder& folder) {
    return json::parse(examples::read(folder / "summary.json"));
}

}  // namespace

TEST_CASE("from the first moment the folder is whole and says that the run is not") {
    const testing::TempFolder folder;
    const outputs::Folder out(folder.path(), outing());
    CHECK(summary_of(folder)["complete"] == false);
    for (const char* name : {"closures.csv", "estimates.csv", "zones.csv"}) {
        INFO(name);
        CHECK(examples::read(folder / name).back() == '\n');
    }
}

TEST_CASE("a closing is in its file as soon as it is told") {
    const testing::TempFolder folder;
    outputs::Folder out(folder.path(), outing());
    out.on_closure(known_closure());
    const std::string text = examples::read(folder / "closures.csv");
    CHECK(std::count(text.begin(), text.end(), '\n') == 2);
}

TEST_CASE("an earlier run's results do not outlive the start of the next") {
    const testing::TempFolder folder;
    {
        outputs::Folder first(folder.path(), outing());
        first.on_closure(known_closure());
        first.on_end({.complete = true});
        REQUIRE(summary_of(folder)["closures"]["total"] == 1);
    }
    const outputs::Folder second(folder.path(), outing());
    CHECK(summary_of(folder)["closures"]["total"] == 0);
    CHECK(examples::read(folder / "zones.csv").find('\n') == examples::read(folder / "zones.csv").size() - 1);
}

TEST_CASE("the summary tells counts, areas, channels and health") {
    const testing::TempFolder folder;
    outputs::Folder out(folder.path(), outing());
    out.on_estimate(fast_estimate(1'000'000'000));
    out.on_estimate(fast_estimate(1'020'000'000));

    core::Closure short_one = known_closure();
    short_one.verdict = core::Verdict::short_of;
    short_one.slow = true;
    core::Closure unclear = known_closure();
    unclear.verdict = core::Verdict::unclear;
    core::Closure unbraked = known_closure();
    unbraked.braked = false;
    for (const auto& c : {known_closure(), short_one, unclear, unbraked}) out.on_closure(c);
    out.on_alarm(examples::alarm(core::AlarmKind::short_at_brakes, 5));

    core::HealthTable health{};
    auto& front = health[index(ride_height_channel(0))];
    front.samples = 4000;
    front.gaps = 2;
    front.repeats = 3;
    front.not_finite = 4;
    front.out_of_range = 5;
    front.gated = 6;
    front.interval_s = 0.0025;
    front.trust = core::Trust::distrusted;
    front.fault = core::Fault::stuck;
    front.since_ns = 7'500'000'000;
    out.on_health(8'000'000'000, health);
    out.on_end({.complete = false,
                .reason = "outing.csv: line 9: cut in the middle of a row",
                .duration_s = 10.0,
                .frames = 4000});

    const json s = summary_of(folder);
    CHECK(s["version"] == HOLDFAST_VERSION);
    CHECK(s["log"] == "outing.csv");
    CHECK(s["car"]["name"] == "Car 12");
    CHECK(s["duration"] == 10.0);
    CHECK(s["complete"] == false);
    CHECK(s["incomplete_reason"] == "outing.csv: line 9: cut in the middle of a row");
    CHECK(s["reference"] == "ground");
    CHECK(s["air_density"] == "measured");
    CHECK(s["closures"] == json::parse(R"({"total": 4, "full": 1, "short": 1, "unclear": 1, "no_braking": 1,
                                           "slow": 1})"));
    CHECK(s["alarms"] == json::parse(R"({"short_at_brakes": 1})"));
    CHECK(s["areas"]["flap_closed"]["cla_rear"]["value"].get<double>() == Approx(2.4));
    CHECK(s["areas"]["flap_closed"]["cla_rear"]["sd"].get<double>() == Approx(0.06));
    CHECK(s["areas"]["flap_open"]["cla_rear"]["value"].is_null());

    const json& channel = s["channels"]["ride_height_front"];
    CHECK(channel["samples"] == 4000);
    CHECK(channel["gaps"] == 2);
    CHECK(channel["repeats"] == 3);
    CHECK(channel["rate"].get<double>() == Approx(400.0));
    CHECK(channel["rejected"] == json::parse(R"({"not_finite": 4, "out_of_range": 5, "gated": 6})"));
    CHECK(channel["health"] == "distrusted");
    CHECK(channel["fault"] == "stuck");
    CHECK(channel["since"] == 7.5);
    CHECK(s["channels"]["accel_x"]["health"] == "absent");  // announced, never came
    CHECK_FALSE(s["channels"].contains("heading"));
    CHECK_FALSE(s.contains("link"));
}

TEST_CASE("a live run's summary has the counters of its link") {
    const testing::TempFolder folder;
    outputs::Folder out(folder.path(), outing());
    out.set_link_counters({{"messages", 12}, {"lost", 1}});
    out.on_end({.complete = true});
    CHECK(summary_of(folder)["link"] == json::parse(R"({"messages": 12, "lost": 1})"));
    CHECK(summary_of(folder)["reference"].is_null());
}

TEST_CASE("a folder that cannot be made is an error that names it") {
    const testing::TempFolder folder;
    outputs::write_whole(folder / "file", "in the way");
    CHECK_THROWS_WITH(outputs::Folder(folder / "file/out", outing()), Catch::Contains("file/out"));
}
