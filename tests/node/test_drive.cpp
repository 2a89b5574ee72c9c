// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <fstream>
#include <sstream>

#include "estimator/session/bind.hpp"
#include "estimator/session/car_file.hpp"
#include "firmware_host/car/outing.hpp"
#include "firmware_host/node/drive.hpp"
#include "proto/vocabulary/exit_status.hpp"
#include "tests/proto/recording_files.hpp"

namespace holdfast::node {
namespace {

using namespace holdfast::testing;

std::size_t lines_of(const std::filesystem::path& path) {
    std::ifstream in(path);
    std::size_t lines = 0;
    for (std::string line; std::getline(in, line);) ++lines;
    return lines;
}

TEST_CASE("a drive into a recording holds the outing's frames bit by bit, its truth and its car file") {
    const TempFolder folder;
    DriveOptions options;
    options.scenario = "open_wheel-calm";
    options.seed = 5;
    options.laps = 1;
    options.faults = {"load_rl:gone:10"};
    options.record = folder / "outing.hfr";
    options.truth = folder / "truth";
    options.car = folder / "car.toml";
    INFO("seed " << options.seed);
    REQUIRE(drive(options) == kDone);

    sim::Scenario scenario = sim::make_scenario(options.scenario, options.seed);
    scenario.laps = 1;
    scenario.faults.push_back(sim::parse_fault(options.faults[0], scenario));
    sim::Outing outing(scenario);
    std::vector<Frame> frames;
    for (Frame frame; outing.next(frame);) frames.push_back(frame);

    const ReadBack back = read_recording(options.record);
    CHECK(back.error.empty());
    CHECK(same_bits(back.frames, frames));
    CHECK(lines_of(folder / "truth" / "truth.csv") == outing.truth().size() + 1);
    CHECK(lines_of(folder / "truth" / "truth_closures.csv") == outing.closures().size() + 1);

    const auto car = session::read_car_file(options.car);
    REQUIRE(car);
    CHECK(session::check_against(*car, proto::RecordingReader::open(options.record)->info()).empty());
}

TEST_CASE("a scenario or a fault that is not known is wrong use, and nothing is written") {
    const TempFolder folder;
    DriveOptions options;
    options.record = folder / "outing.hfr";
    options.scenario = "hovercraft";
    CHECK(drive(options) == kWrongUse);
    options.scenario = "open_wheel";
    options.faults = {"load_rl:melted:10"};
    CHECK(drive(options) == kWrongUse);
    CHECK_FALSE(std::filesystem::exists(options.record));
}

}  // namespace
}  // namespace holdfast::node
