// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <stdexcept>

#include "estimator/outputs/line_file.hpp"
#include "tests/outputs/examples.hpp"

using namespace holdfast;
using outputs::LineFile;

TEST_CASE("a line that is flushed by line is in the file at once") {
    const testing::TempFolder folder;
    LineFile file(folder / "a.csv", LineFile::Flush::each_line);
    file.add("one\n");
    CHECK(examples::read(folder / "a.csv") == "one\n");
}

TEST_CASE("a file that is flushed by block never shows half a line") {
    const testing::TempFolder folder;
    LineFile file(folder / "a.csv", LineFile::Flush::by_block);
    std::size_t seen_growing = 0;
    for (int i = 0; i < 20000; ++i) {
        file.add("a line of some length, number " + std::to_string(i) + "\n");
        if (i % 500 != 0) continue;
        const std::string text = examples::read(folder / "a.csv");
        if (text.empty()) continue;
        ++seen_growing;
        REQUIRE(text.back() == '\n');
    }
    CHECK(seen_growing > 0);
}

TEST_CASE("a file that cannot be made is an error that names it") {
    const testing::TempFolder folder;
    CHECK_THROWS_WITH(LineFile(folder / "no/such/a.csv", LineFile::Flush::each_line),
                      Catch::Contains("no/such/a.csv") && Catch::Contains("No such file"));
}

TEST_CASE("a full disk is an error that names the file") {
    LineFile file("/dev/full", LineFile::Flush::each_line);
    CHECK_THROWS_WITH(file.add("one\n"), Catch::Contains("/dev/full") && Catch::Contains("No space left"));
}

TEST_CASE("a text is replaced as a whole") {
    const testing::TempFolder folder;
    outputs::write_whole(folder / "s.json", "first");
    outputs::write_whole(folder / "s.json", "second, longer");
    CHECK(examples::read(folder / "s.json") == "second, longer");
    CHECK_FALSE(std::filesystem::exists(folder / "s.json.part"));
}
