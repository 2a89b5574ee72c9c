// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <csignal>

#include "tests/end_to_end/logs.hpp"
#include "tests/end_to_end/node.hpp"
#include "tests/end_to_end/process.hpp"

using namespace holdfast::testing;
using Catch::Contains;

TEST_CASE("Ctrl-C and SIGTERM end a live run cleanly: files whole, marked incomplete, status 3") {
    const int signal = GENERATE(SIGINT, SIGTERM);
    INFO("signal " << signal);
    const TempFolder folder;
    const Node node(demo_log(), "20", folder.path());
    Process live("holdfast", live_words(node.endpoint(), folder / "out"), folder.path());
    REQUIRE(live.says("closing 1"));
    live.send(signal);
    REQUIRE(live.wait(std::chrono::seconds(10)) == 3);

    const Completeness said = completeness(folder / "out");
    CHECK_FALSE(said.complete);
    CHECK_THAT(said.reason, Contains("stopped by"));
    CHECK(said.closings >= 1);
    for (const char* name : {"closures.csv", "estimates.csv", "zones.csv", "summary.json"}) {
        INFO(name);
        const std::string text = read_file(folder / ("out/" + std::string(name)));
        REQUIRE_FALSE(text.empty());
        CHECK(text.back() == '\n');
    }
    CHECK_THAT(live.out(), Contains("INCOMPLETE"));
}

TEST_CASE("a live run that was killed leaves whole lines and a summary that says incomplete") {
    const TempFolder folder;
    const Node node(demo_log(), "20", folder.path());
    Process live("holdfast", live_words(node.endpoint(), folder / "out"), folder.path());
    REQUIRE(live.says("closing 1"));
    live.send(SIGKILL);
    REQUIRE(live.wait(std::chrono::seconds(10)) == 128 + SIGKILL);
    CHECK_FALSE(completeness(folder / "out").complete);
    CHECK(read_file(folder / "out/closures.csv").back() == '\n');
    CHECK(read_file(folder / "out/estimates.csv").back() == '\n');
}
