// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>
#include <sstream>

#include "estimator/outputs/json_lines.hpp"
#include "tests/outputs/examples.hpp"

using namespace holdfast;
using nlohmann::json;

TEST_CASE("a closing as JSON has the columns of closures.csv, unknown ones null") {
    core::Closure c = examples::known_closure();
    c.whole = false;
    const json j = json::parse(outputs::closure_json(c, 0.24))["closure"];
    CHECK(j["closure"] == 5);
    CHECK(j["time_command"] == 117.633);
    CHECK(j["t95"].is_null());
    CHECK(j["verdict"] == "full");
    CHECK(j.size() == 24);
}

TEST_CASE("an alarm as JSON never has a number where there is none") {
    const auto unknown =
        json::parse(outputs::alarm_json(examples::alarm(core::AlarmKind::unknown_at_brakes, 6), {}))["alarm"];
    CHECK(unknown["kind"] == "unknown_at_brakes");
    CHECK(unknown["closure"] == 6);
    CHECK(unknown["probability"].is_null());

    const auto stale =
        json::parse(outputs::alarm_json(examples::alarm(core::AlarmKind::data_stale), {}))["alarm"];
    CHECK(stale["channel"] == "speed");
    CHECK_FALSE(stale.contains("probability"));
}

TEST_CASE("the last line is the summary") {
    const testing::TempFolder folder;
    outputs::Folder files(folder.path(), {});
    std::ostringstream out;
    outputs::JsonLines lines(out, files);
    files.on_closure(examples::known_closure());
    lines.on_closure(examples::known_closure());
    files.on_end({.complete = true});
    lines.on_end({.complete = true});
    std::istringstream in(out.str());
    std::string first;
    std::string second;
    std::getline(in, first);
    std::getline(in, second);
    CHECK(json::parse(first).contains("closure"));
    CHECK(json::parse(second)["summary"]["closures"]["total"] == 1);
}
