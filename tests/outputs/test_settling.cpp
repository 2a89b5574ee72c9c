// SPDX-License-Identifier: MIT
// A car file held against an outing of the simulated car: what is wrong in it is named, what is right is not.
#include <catch2/catch.hpp>
#include <cmath>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <memory>
#include <regex>
#include <stdexcept>
#include <string>
#include <utility>
#include <vector>

#include "estimator/core/engine.hpp"
#include "estimator/outputs/settling.hpp"
#include "estimator/session/bind.hpp"
#include "estimator/session/car_file.hpp"
#include "firmware_host/car/outing.hpp"
#include "tests/temp_folder.hpp"

namespace {

using namespace holdfast;

// The workshop that makes no errors, and is sure of its springs and tyres to 1 %.
std::string true_car_text(const sim::Scenario& scenario) {
    std::string text = sim::car_file_text(scenario, 0.0);
    text = std::regex_replace(text, std::regex("(wheel_rate|tyre_rate) = ([0-9.]+)\n"),
                              "$1 = $2\n$1_sd = 1500\n");
    return text;
}

// The rear spring's line with the rate times a factor, and a comment of the workshop's.
std::string with_rear_wheel_rate(const std::string& text, double npm) {
    const std::size_t rear = text.find("[rear]");
    const std::regex line("wheel_rate = [0-9.]+\n");
    return text.substr(0, rear) +
           std::regex_replace(text.substr(rear), line,
                              "wheel_rate = " + std::to_string(npm) + "  # red springs\n",
                              std::regex_constants::format_first_only);
}

session::CarFile car_file(const std::string& path) {
    auto file = session::read_car_file(path);
    if (!file) throw std::runtime_error(session::to_string(file.errors()));
    return std::move(*file);
}

core::Learned learned(const sim::Scenario& scenario, const session::CarFile& file) {
    sim::Outing outing(scenario);
    const auto bound = session::bind_ride_heights(file, outing.info());
    REQUIRE(bound);
    const auto engine = std::make_unique<core::Engine>(bound->car, core::Settings{});
    Frame frame;
    while (outing.next(frame)) (void)engine->step(frame);
    engine->finish();
    return engine->learned();
}

std::string read(const std::filesystem::path& path) {
    std::ifstream in(path);
    return {std::istreambuf_iterator<char>(in), {}};
}

}  // namespace

TEST_CASE("heavy_closed, seed 3: a rear wheel rate that is 8 % off is named, and the proposal is nearer") {
    sim::Scenario scenario = sim::make_scenario("heavy_closed", 3);
    scenario.laps = 2;
    const double truth_npm = scenario.chassis.rear.wheel_rate_npm;
    const testing::TempFolder folder;
    const auto path = (folder / "car.toml").string();
    std::ofstream(path) << with_rear_wheel_rate(true_car_text(scenario), 1.08 * truth_npm);
    const session::CarFile file = car_file(path);
    const auto comparisons = outputs::compare(file.car, learned(scenario, file));

    std::vector<outputs::Comparison> apart;
    for (const auto& c : comparisons) {
        INFO(outputs::sentence(c));
        CHECK(c.disagrees() == (c.what == "rear wheel_rate"));
        if (c.disagrees()) apart.push_back(c);
    }
    REQUIRE(apart.size() == 1);
    INFO(outputs::sentence(apart.front()));
    CHECK(outputs::sentence(apart.front()).starts_with("rear wheel_rate: the file says "));

    const auto changes = outputs::proposals(comparisons);
    REQUIRE(changes.size() == 1);
    CHECK(std::abs(changes[0].value.value - truth_npm) < 0.06 * truth_npm);
    const auto text = session::changed_car_file(path, changes);
    REQUIRE(text);
    const auto proposed_path = (folder / "proposed.toml").string();
    std::ofstream(proposed_path) << *text;
    const session::CarFile proposed = car_file(proposed_path);
    CHECK(proposed.car.rear.wheel_rate_npm.value == Approx(changes[0].value.value).epsilon(1e-5));
    CHECK(proposed.car.rear.wheel_rate_npm.sd == Approx(changes[0].value.sd).epsilon(1e-5));
    CHECK(proposed.car.front.wheel_rate_npm.value == file.car.front.wheel_rate_npm.value);
    CHECK(text->find("# red springs; wheel_rate was ") != std::string::npos);
}

TEST_CASE("a car file that is right is not contradicted, and its proposal is the file itself") {
    const std::string family = GENERATE("open_wheel", "heavy_closed");
    INFO(family << ", seed 3");
    sim::Scenario scenario = sim::make_scenario(family, 3);
    scenario.laps = 2;
    const testing::TempFolder folder;
    const auto path = (folder / "car.toml").string();
    std::ofstream(path) << true_car_text(scenario);
    const session::CarFile file = car_file(path);
    const core::Learned taught = learned(scenario, file);
    REQUIRE(taught.front.rate_npm);
    REQUIRE(taught.rear.rate_npm);
    const auto comparisons = outputs::compare(file.car, taught);
    CHECK(comparisons.size() == 6);
    for (const auto& c : comparisons) {
        INFO(outputs::sentence(c));
        CHECK_FALSE(c.disagrees());
    }
    const auto text = session::changed_car_file(path, outputs::proposals(comparisons));
    REQUIRE(text);
    CHECK(*text == read(path));
}

TEST_CASE("wheel rate from the series rate, with both uncertainties") {
    // Springs of 160 N/mm on tyres of 240 N/mm: a corner of 96 N/mm, an axle of 192 N/mm.
    const auto rate = outputs::wheel_rate_npm({192e3, 1920.0}, {240e3, 2400.0});
    REQUIRE(rate);
    CHECK(rate->value == Approx(160e3));
    // By small differences: 1 % of the series is 1.667 %, 1 % of the tyre 0.667 % of the wheel rate.
    CHECK(rate->sd == Approx(160e3 * std::hypot(1.0 / 60.0, 1.0 / 150.0)));
    CHECK_FALSE(outputs::wheel_rate_npm({500e3, 1.0}, {240e3, 2400.0}));  // stiffer than its tyres
}
