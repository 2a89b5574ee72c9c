// SPDX-License-Identifier: MIT
#include <algorithm>
#include <catch2/catch.hpp>
#include <fstream>

#include "tests/end_to_end/logs.hpp"
#include "tests/end_to_end/process.hpp"

using namespace holdfast::testing;
using Catch::Contains;

namespace {

constexpr std::size_t kSeconds = 40;

// The first half of a text, with `instead` where the second was.
std::string half_of(const std::string& text, const std::string& instead) {
    const std::size_t row_end = text.find('\n', text.size() / 2);
    REQUIRE(row_end != std::string::npos);
    return text.substr(0, row_end + 1) + instead;
}

std::size_t lines(const std::string& text) {
    return static_cast<std::size_t>(std::count(text.begin(), text.end(), '\n'));
}

}  // namespace

TEST_CASE("a log that breaks half way yields its first half's results, marked incomplete, and status 3") {
    const TempFolder folder;
    const std::string whole_log = first_seconds(static_cast<double>(kSeconds), folder);
    const std::string broken_log = folder / "broken.csv";
    std::ofstream(broken_log, std::ios::binary) << half_of(read_file(whole_log), "20.123,oops");

    const std::string whole = folder / "whole";
    const std::string broken = folder / "broken";
    REQUIRE(run("holdfast", {"replay", whole_log, "--car", demo_car(), "--out", whole, "--as-live"},
                folder.path())
                .status == 0);
    const Ended ended = run(
        "holdfast", {"replay", broken_log, "--car", demo_car(), "--out", broken, "--as-live"}, folder.path());

    CHECK(ended.status == 3);
    CHECK_THAT(ended.err, Contains("broken.csv") && Contains("line"));
    const Completeness said = completeness(broken);
    CHECK_FALSE(said.complete);
    CHECK_THAT(said.reason, Contains("broken.csv"));
    CHECK(completeness(whole).complete);

    // Nothing that was read well is lost: the half is the begin of the whole, to the byte.
    const std::string half = read_file(folder / "broken/estimates.csv");
    CHECK(lines(half) > kSeconds * 50 / 3);
    CHECK(read_file(folder / "whole/estimates.csv").starts_with(half));
}

TEST_CASE("a recording that was cut yields what it has, marked incomplete, and status 3") {
    const TempFolder folder;
    const std::string recording = folder / "cut.hfr";
    const std::string bytes = read_file(demo_log());
    std::ofstream(recording, std::ios::binary) << bytes.substr(0, bytes.size() / 3);
    const Ended ended =
        run("holdfast", {"replay", recording, "--car", demo_car(), "--out", folder / "out"}, folder.path());
    CHECK(ended.status == 3);
    CHECK_THAT(ended.err, Contains("cut.hfr"));
    CHECK_FALSE(completeness(folder / "out").complete);
    CHECK(lines(read_file(folder / "out/estimates.csv")) > 100);
}
