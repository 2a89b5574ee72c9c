// SPDX-License-Identifier: MIT
// holdfast settle on an outing that carnode drove, with the workshop's own car file and with a rear spring in
// it that is not the car's.
#include <catch2/catch.hpp>
#include <cmath>
#include <fstream>
#include <regex>
#include <string>

#include "estimator/session/car_file.hpp"
#include "firmware_host/car/scenario.hpp"
#include "tests/end_to_end/process.hpp"
#include "tests/temp_folder.hpp"

using namespace holdfast;
using namespace holdfast::testing;

namespace {

core::Quantity rear_wheel_rate_npm(const std::string& path) {
    const auto file = session::read_car_file(path);
    REQUIRE(file);
    return file->car.rear.wheel_rate_npm;
}

// The rear wheel rate's line with another number.
std::string with_rear_wheel_rate(const std::string& text, double npm) {
    const std::size_t rear = text.find("[rear]");
    return text.substr(0, rear) + std::regex_replace(text.substr(rear), std::regex("wheel_rate = [0-9.]+"),
                                                     "wheel_rate = " + std::to_string(npm),
                                                     std::regex_constants::format_first_only);
}

}  // namespace

TEST_CASE(
    "settle names a wrong rear spring, proposes one near the car's, and lets a right file be, seed 11") {
    const TempFolder folder;
    const std::string log = folder / "outing.hfr", right = folder / "right.toml";
    const std::string wrong = folder / "wrong.toml", proposed = folder / "proposed.toml";
    REQUIRE(run("carnode",
                {"drive", "--scenario", "prototype", "--seed", "11", "--laps", "2", "--pace", "0", "--record",
                 log, "--write-car", right},
                folder.path())
                .status == 0);
    const std::string text = read_file(right);
    const double truth_npm = sim::make_scenario("prototype", 11).chassis.rear.wheel_rate_npm;

    const Ended calm = run("holdfast", {"settle", log, "--car", right, "--out", proposed}, folder.path());
    INFO(calm.out << calm.err);
    CHECK(calm.status == 0);
    CHECK(calm.out.find("Nothing that the file says is contradicted.") != std::string::npos);
    CHECK(read_file(proposed) == text);

    std::ofstream(wrong) << with_rear_wheel_rate(text, 1.25 * truth_npm);
    const Ended told = run("holdfast", {"settle", log, "--car", wrong, "--out", proposed}, folder.path());
    INFO(told.out << told.err);
    CHECK(told.status == 0);
    CHECK(told.out.starts_with("File and data disagree by more than they should:\n  rear wheel_rate: "));
    CHECK(told.out.find("1 value changed") != std::string::npos);
    const core::Quantity rate = rear_wheel_rate_npm(proposed);
    CHECK(std::abs(rate.value - truth_npm) < 2.0 * rate.sd);
    CHECK(rate.sd < 0.08 * truth_npm);
}
