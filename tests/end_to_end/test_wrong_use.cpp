// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>

#include "tests/end_to_end/logs.hpp"
#include "tests/end_to_end/process.hpp"

using namespace holdfast::testing;
using Catch::Contains;

TEST_CASE("a command line that makes no sense ends with status 2 and says why") {
    const TempFolder folder;
    const std::string out = folder / "out";
    const auto words = GENERATE_COPY(
        std::vector<std::string>{}, std::vector<std::string>{"forecast"},
        std::vector<std::string>{"replay", demo_log(), "--car", demo_car()},
        std::vector<std::string>{"replay", demo_log(), "--car", demo_car(), "--out", out, "--rate", "0"},
        std::vector<std::string>{"replay", demo_log(), "--car", demo_car(), "--out", out, "--speed", "fast"},
        std::vector<std::string>{"live", "--car", demo_car(), "--out", out},
        std::vector<std::string>{"convert", demo_log(), out + "/outing.txt"});
    const Ended ended = run("holdfast", words, folder.path());
    CHECK(ended.status == 2);
    CHECK_FALSE(ended.err.empty());
    CHECK_FALSE(std::filesystem::exists(out));
}

TEST_CASE("input that cannot be used at all ends with status 1, names the file and writes nothing") {
    const TempFolder folder;
    const std::string out = folder / "out";
    const std::string missing = folder / "no-such-file";
    const auto words =
        GENERATE_COPY(std::vector<std::string>{"replay", missing, "--car", demo_car(), "--out", out},
                      std::vector<std::string>{"replay", demo_log(), "--car", missing, "--out", out},
                      std::vector<std::string>{"replay", demo_log(), "--car", demo_car(), "--channels",
                                               missing, "--out", out});
    const Ended ended = run("holdfast", words, folder.path());
    CHECK(ended.status == 1);
    CHECK_THAT(ended.err, Contains("no-such-file"));
    CHECK_FALSE(std::filesystem::exists(out));
}

TEST_CASE("every command has --help and --version, and those that advise carry the cautions") {
    const TempFolder folder;
    const std::string command = GENERATE("replay", "live", "convert", "keys");
    INFO(command);
    const Ended help = run("holdfast", {command, "--help"}, folder.path());
    CHECK(help.status == 0);
    CHECK_THAT(help.out, Contains("--help"));
    if (command == "replay" || command == "live") CHECK_THAT(help.out, Contains("not a safety device"));
    const Ended version = run("holdfast", {command, "--version"}, folder.path());
    CHECK(version.status == 0);
    CHECK(version.out == "holdfast " HOLDFAST_VERSION "\n");
}

TEST_CASE("holdfast keys describes the keys of the car file") {
    const TempFolder folder;
    const Ended ended = run("holdfast", {"keys"}, folder.path());
    CHECK(ended.status == 0);
    for (const char* key : {"mass", "front_weight_share", "anti_dive", "tyre_growth"})
        CHECK_THAT(ended.out, Contains(key));
}
