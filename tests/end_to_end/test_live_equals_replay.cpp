// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>

#include "tests/end_to_end/logs.hpp"
#include "tests/end_to_end/node.hpp"
#include "tests/end_to_end/process.hpp"

using namespace holdfast::testing;

TEST_CASE("replay --as-live equals live to the bit through real sockets") {
    const TempFolder folder;
    {
        const Node node(demo_log(), "0", folder.path());
        const Ended live = run("holdfast", live_words(node.endpoint(), folder / "live"), folder.path());
        INFO(live.err);
        REQUIRE(live.status == 0);
    }
    const Ended replay =
        run("holdfast", {"replay", demo_log(), "--as-live", "--car", demo_car(), "--out", folder / "replay"},
            folder.path());
    REQUIRE(replay.status == 0);

    CHECK(completeness(folder / "live").closings > 0);
    for (const char* name : {"closures.csv", "estimates.csv", "zones.csv"}) {
        INFO(name);
        const std::string live_text = read_file(folder / ("live/" + std::string(name)));
        CHECK_FALSE(live_text.empty());
        CHECK(live_text == read_file(folder / ("replay/" + std::string(name))));
    }
    const auto link = nlohmann::json::parse(read_file(folder / "live/summary.json")).at("link");
    CHECK(link.at("lost_frames") == 0);
    CHECK(link.at("damaged") == 0);
}

TEST_CASE("two replays of one log write the same files") {
    const TempFolder folder;
    const std::string log = first_seconds(40.0, folder);
    for (const char* name : {"one", "two"})
        REQUIRE(run("holdfast", {"replay", log, "--car", demo_car(), "--out", folder / name}, folder.path())
                    .status == 0);
    for (const char* name : {"closures.csv", "estimates.csv", "zones.csv", "summary.json"}) {
        INFO(name);
        CHECK(read_file(folder / ("one/" + std::string(name))) ==
              read_file(folder / ("two/" + std::string(name))));
    }
}
