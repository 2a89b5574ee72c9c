// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>

#include "tests/end_to_end/logs.hpp"
#include "tests/end_to_end/process.hpp"

using namespace holdfast::testing;

TEST_CASE("a log converted to a recording and back is the same log, to the byte") {
    const TempFolder folder;
    const std::string csv = first_seconds(10.0, folder);
    const std::string recording = folder / "there.hfr";
    const std::string back = folder / "back.csv";
    REQUIRE(run("holdfast", {"convert", csv, recording}, folder.path()).status == 0);
    REQUIRE(run("holdfast", {"convert", recording, back}, folder.path()).status == 0);
    CHECK(read_file(back).size() > 10'000);
    CHECK(read_file(back) == read_file(csv));
}

TEST_CASE("a log is not written over itself") {
    const TempFolder folder;
    const std::string csv = first_seconds(1.0, folder);
    const std::string before = read_file(csv);
    const Ended ended = run("holdfast", {"convert", csv, csv}, folder.path());
    CHECK(ended.status == 2);
    CHECK(read_file(csv) == before);
}
