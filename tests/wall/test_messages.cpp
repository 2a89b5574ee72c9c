// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <limits>
#include <nlohmann/json.hpp>

#include "estimator/wall/messages.hpp"
#include "tests/wall/examples.hpp"

using namespace holdfast;
using nlohmann::json;

TEST_CASE("a greeting names car, origin, limits and the channels with their units") {
    const json j = json::parse(wall::hello_json(*examples::hello()));
    CHECK(j.at("kind") == "hello");
    CHECK(j.at("car") == "Plover 11");
    CHECK(j.at("reference") == "ground");
    CHECK(j.at("limits").at("short_share") == 0.03);
    CHECK(j.at("channels") == json::parse(R"([{"name":"speed","unit":"m/s"}])"));
}

TEST_CASE("samples: a column of one length each, what is not known is null") {
    wall::Row row = examples::row(1);
    row.value[wall::column("flap")] = std::numeric_limits<double>::quiet_NaN();
    row.value[wall::column("load_rear")] = 12345.678;
    row.flags = core::kStale | core::kSlow;
    row.lap = 3.0;
    row.lap_distance_m = std::numeric_limits<double>::quiet_NaN();
    const wall::Row rows[] = {examples::row(0), row};
    const json j =
        json::parse(wall::now_json({.thinned = {}, .rows = rows, .newest = row, .any = true, .link = {}}));
    CHECK(j.at("samples").size() == 1 + wall::kColumns.size());
    for (const auto& column : j.at("samples")) CHECK(column.size() == 2);
    CHECK(j.at("samples").at("t") == json{0.0, 0.02});
    CHECK(j.at("samples").at("flap") == json{1.0, nullptr});
    CHECK(j.at("samples").at("load_rear")[1] == 12345.7);
    CHECK(j.at("flags") == json{"stale", "slow"});
    CHECK(j.at("t") == 0.02);
    CHECK(j.at("lap") == 3);
    CHECK(j.at("lap_distance").is_null());
    CHECK_FALSE(j.contains("thinned"));
}

TEST_CASE("before the first sample there is nothing but the link's state") {
    const json j = json::parse(wall::now_json({.thinned = {}, .rows = {}, .newest = {}, .link = {}}));
    CHECK(j.at("t").is_null());
    CHECK(j.at("samples").at("t").empty());
    CHECK(j.at("link").at("state") == "up");
}

TEST_CASE("times keep a tenth of a millisecond after a day") {
    wall::Row row = examples::row(0);
    row.time_ns = 86'399'123'400'000;
    const json j = json::parse(wall::history_json({&row, 1}, 0.1));
    CHECK(j.at("columns").at("t")[0].get<double>() == 86399.1234);
}

TEST_CASE("a closing that could not be judged has no numbers that look like a judgement") {
    core::Closure c = examples::closure(5);
    json j = json::parse(wall::closure_object(c, 0.2));
    CHECK(j.at("margin") == json{0.068, 0.013});
    CHECK(j.at("chords").get<double>() == Approx(0.12 * 90.0 / 0.2));
    CHECK(j.at("verdict") == "full");
    c.reattachment_known = false;
    j = json::parse(wall::closure_object(c, 0.2));
    for (const char* key : {"tau", "t95", "t95_low", "t95_high", "plateau", "chords", "margin", "shortfall",
                            "shortfall_share", "probability_short", "probability_slow"})
        CHECK(j.at(key).is_null());
    CHECK(j.at("slow") == false);
    c.reattachment_known = true;
    c.braked = false;
    j = json::parse(wall::closure_object(c, 0.2));
    CHECK(j.at("verdict").is_null());
    CHECK(j.at("time_brake").is_null());
}

TEST_CASE("a regrowth has its curve and as much of the flap's movement as there is") {
    wall::ZonedRegrowth r = *examples::regrowth(7, true);
    r.curve.flap_count = 2;
    r.curve.flap_position[1] = 0.5;
    const json j = json::parse(wall::message_of("regrowth", wall::regrowth_object(r)));
    CHECK(j.at("kind") == "regrowth");
    CHECK(j.at("closure") == 7);
    CHECK(j.at("t").size() == core::Regrowth::kPoints);
    CHECK(j.at("t")[0] == -0.2);
    CHECK(j.at("flap").at("position") == json{0.0, 0.5});
}

TEST_CASE("an alarm tells what it speaks of") {
    wall::RailAlarm a = examples::raised(3).alarm;
    json j = json::parse(wall::alarm_object(a, {}));
    CHECK(j.at("condition") == "short_at_brakes");
    CHECK(j.at("severity") == "high");
    CHECK(j.at("closure") == nullptr);  // last_closure is the rail's to fill
    CHECK(j.at("channel").is_null());
    CHECK(j.at("by_s").is_null());
    a.alarm.kind = core::AlarmKind::sensor_distrusted;
    a.alarm.channel = Channel::ride_height_0;
    j = json::parse(wall::alarm_object(a, {.ride_height_names = {"front"}, .origin = {}}));
    CHECK(j.at("channel") == "ride_height_front");
}

TEST_CASE("health lists the channels that were announced or came") {
    wall::Health h = *examples::health(2'000'000'000);
    h.table[index(Channel::load_fl)].samples = 5;
    h.table[index(Channel::load_fl)].last_time_ns = 1'500'000'000;
    const json j = json::parse(wall::health_json(h, examples::hello()->channels));
    REQUIRE(j.at("channels").size() == 2);
    CHECK(j.at("channels")[0].at("name") == "speed");
    CHECK(j.at("channels")[0].at("age_s").is_null());
    CHECK(j.at("channels")[1].at("age_s") == 0.5);
    CHECK(j.at("channels")[1].at("innovation").is_null());
}

TEST_CASE("the page may acknowledge an alarm, and say nothing else") {
    CHECK(wall::acknowledgement(R"({"do":"acknowledge","id":7})") == 7U);
    for (const char* text :
         {"", "7", "[]", "{}", R"({"do":"acknowledge"})", R"({"id":7})", R"({"do":"stop","id":7})",
          R"({"do":"acknowledge","id":-7})", R"({"do":"acknowledge","id":"7"})",
          R"({"do":"acknowledge","id":7.5})", R"({"do":"acknowledge","id":4294967296})",
          R"({"do":"acknowledge","id":7,"x":1})", R"({"do":"acknowledge","id":7)",
          R"([{"do":"acknowledge","id":7}])", "\xff\xfe"})
        CHECK_FALSE(wall::acknowledgement(text).has_value());
}

TEST_CASE("names that are no UTF-8 do not stop the page") {
    const std::string text = wall::hello_json(*examples::hello(1, "Pl\xffver"));
    CHECK(json::parse(text).at("car") == "Pl\xEF\xBF\xBDver");
}
