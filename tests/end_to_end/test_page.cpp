// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <csignal>

#include "tests/end_to_end/logs.hpp"
#include "tests/end_to_end/node.hpp"
#include "tests/end_to_end/process.hpp"

using namespace holdfast::testing;
using Catch::Contains;

TEST_CASE("the page of a replay stays until Ctrl-C, which then is no failure") {
    const TempFolder folder;
    Process replay("holdfast",
                   {"replay", first_seconds(60.0, folder), "--car", demo_car(), "--out", folder / "out",
                    "--page", "127.0.0.1:0"},
                   folder.path());
    REQUIRE(replay.says("page at http://127.0.0.1:"));
    REQUIRE(replay.says("the page stays until Ctrl-C"));
    CHECK(completeness(folder / "out").complete);
    CHECK_THAT(read_file(folder / "out/report.html"), Contains("</html>"));
    replay.send(SIGINT);
    CHECK(replay.wait(std::chrono::seconds(10)) == 0);
}

TEST_CASE("a live run with a page ends with its stream") {
    const TempFolder folder;
    const Node node(demo_log(), "20", folder.path());
    std::vector<std::string> words = live_words(node.endpoint(), folder / "out");
    words.insert(words.end(), {"--page", "127.0.0.1:0"});
    Process live("holdfast", words, folder.path());
    CHECK(live.says("page at http://127.0.0.1:"));
    CHECK(live.wait() == 0);
    CHECK_THAT(read_file(folder / "out/report.html"), Contains("</html>"));
}

TEST_CASE("a page address that cannot be had is named, and nothing else is done") {
    const TempFolder folder;
    for (const std::string address : {"nowhere", "127.0.0.1:99999", "203.0.113.7:8080"}) {
        const Ended ended =
            run("holdfast",
                {"replay", demo_log(), "--car", demo_car(), "--out", folder / "out", "--page", address},
                folder.path());
        CHECK(ended.status == 1);
        CHECK_THAT(ended.err, Contains("page address '" + address + "'"));
        CHECK_FALSE(std::filesystem::exists(folder / "out"));
    }
}
