// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <map>

#include "estimator/outputs/tables.hpp"
#include "estimator/outputs/words.hpp"
#include "tests/outputs/examples.hpp"

using namespace holdfast;
using examples::cells;
using examples::known_closure;

namespace {

constexpr double kChordM = 0.24;

std::map<std::string, std::string> named_row(const core::Closure& closure) {
    const auto names = cells(std::string(outputs::closures_header()));
    const auto values = cells(outputs::closure_row(closure, kChordM));
    REQUIRE(names.size() == values.size());
    std::map<std::string, std::string> row;
    for (std::size_t i = 0; i < names.size(); ++i) row[names[i]] = values[i];
    return row;
}

void check_empty(const std::map<std::string, std::string>& row, std::initializer_list<const char*> names) {
    for (const char* name : names) {
        INFO(name);
        CHECK(row.at(name).empty());
    }
}

}  // namespace

TEST_CASE("closures.csv has the promised columns in their order") {
    CHECK(outputs::closures_header() ==
          "closure,lap,zone,time_command,time_closed,speed,closing_time,tau,tau_sd,t95,t95_low,t95_high,"
          "plateau,chords,time_brake,margin,margin_sd,shortfall,shortfall_sd,shortfall_share,"
          "probability_short,probability_slow,slow,verdict\n");
}

TEST_CASE("a closing that is known fills every cell of its row") {
    auto row = named_row(known_closure());
    for (const auto& [name, value] : row) {
        INFO(name);
        CHECK_FALSE(value.empty());
    }
    CHECK(row["time_command"] == "117.633");
    CHECK(row["t95"] == "0.12");
    CHECK(std::stod(row["chords"]) == Approx(0.12 * 90.0 / kChordM));
    CHECK(row["slow"] == "0");
    CHECK(row["verdict"] == "full");
}

TEST_CASE("a closing that does not come back whole has no instant of 95 %") {
    core::Closure c = known_closure();
    c.whole = false;
    c.plateau = 0.7;
    c.slow = true;
    c.verdict = core::Verdict::short_of;
    auto row = named_row(c);
    check_empty(row, {"t95", "t95_high", "chords", "margin", "margin_sd"});
    CHECK(row["t95_low"] == "0.1");
    CHECK(row["plateau"] == "0.7");
    CHECK(row["slow"] == "1");
    CHECK(row["shortfall"] == "110");
    CHECK(row["verdict"] == "short");
}

TEST_CASE("where no braking followed nothing is said about the brakes") {
    core::Closure c = known_closure();
    c.braked = false;
    c.zone = 0;
    auto row = named_row(c);
    check_empty(row, {"time_brake", "margin", "margin_sd", "shortfall", "shortfall_sd", "shortfall_share",
                      "probability_short", "verdict"});
    CHECK(row["t95"] == "0.12");
    CHECK(row["probability_slow"] == "0.05");
}

TEST_CASE("what the data could not tell is empty, never 0, and the verdict is unclear") {
    core::Closure c = known_closure();
    c.reattachment_known = false;
    c.verdict = core::Verdict::unclear;
    auto row = named_row(c);
    check_empty(row, {"tau", "tau_sd", "t95", "t95_low", "t95_high", "plateau", "chords", "margin",
                      "margin_sd", "shortfall", "shortfall_sd", "shortfall_share", "probability_short",
                      "probability_slow", "slow"});
    CHECK(row["verdict"] == "unclear");
    CHECK(row["time_brake"] == "117.8835");
}

TEST_CASE("the first closings, too, have a probability of slow") {
    core::Closure c = known_closure();
    c.usual_known = false;
    auto row = named_row(c);
    CHECK(std::stod(row["probability_slow"]) == Approx(c.probability_slow));
    CHECK(row["slow"] == "0");
}

TEST_CASE("estimates.csv has the promised columns, and flags in words") {
    CHECK(outputs::estimates_header() ==
          "t,speed,air_density,cla_front,cla_front_sd,cla_rear,cla_rear_sd,cda,cda_sd,attached,"
          "downforce_front,downforce_rear,drag,flags\n");
    core::Estimate e;
    e.time_ns = 20'500'000'000;
    e.flags = core::kGroundReference | core::kFlapOpen;
    e.speed_mps = 80.0;
    e.air_density_kgpm3 = 1.18;
    e.cla_front_m2 = {1.75, 0.02};
    e.cla_rear_m2 = {2.25, 0.03};
    e.cda_m2 = {1.25, 0.0625};
    e.attached = {0.5, 0.1};
    e.downforce_front_n = {6600.0, 80.0};
    e.downforce_rear_n = {8500.0, 110.0};
    e.drag_n = {4700.0, 200.0};
    CHECK(outputs::estimate_row(e) ==
          "20.5,80,1.18,1.75,0.02,2.25,0.03,1.25,0.0625,0.5,6600,8500,4700,ground_reference|flap_open\n");
}

TEST_CASE("every flag has a word of its own") {
    std::map<std::string, int> seen;
    for (unsigned bit = 0; bit < 9; ++bit) ++seen[outputs::flag_words(1U << bit)];
    CHECK(seen.size() == 9);
    CHECK(seen.count("") == 0);
    CHECK(outputs::flag_words(0).empty());
}
