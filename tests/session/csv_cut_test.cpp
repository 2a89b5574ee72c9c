// SPDX-License-Identifier: MIT
// A small log cut at every byte, plain and packed: what was whole comes, and a cut is said.
#include <algorithm>
#include <catch2/catch.hpp>
#include <sstream>

#include "estimator/session/byte_sink.hpp"
#include "tests/session/small_log.hpp"

namespace holdfast::session {
namespace {

using namespace holdfast::testing;

std::string some_log() {
    std::string text = kSmallHeader + ",note\n";
    for (int row = 0; row < 30; ++row) {
        text += std::to_string(row) + "." + std::to_string(row * 7) + "," + std::to_string(50 + row * 0.37) +
                "," + std::to_string(row * 31 % 17) + ",,2000.25,2001,0.5,0.0" + std::to_string(row + 10) +
                ",\"n,\n\"\n";
    }
    return text;
}

std::string packed(const std::string& text, const std::string& name) {
    const TempFolder folder;
    const std::string path = folder / name;
    auto sink = ByteSink::create(path);
    REQUIRE(sink);
    REQUIRE_FALSE((*sink)->write(text));
    REQUIRE_FALSE((*sink)->finish());
    std::ostringstream content;
    content << std::ifstream(path, std::ios::binary).rdbuf();
    return content.str();
}

bool same(const Frame& a, const Frame& b) {
    if (a.time_ns != b.time_ns || a.present != b.present) return false;
    for (std::size_t i = 0; i < kChannelCount; ++i) {
        if (a.has(static_cast<Channel>(i)) && a.value[i] != b.value[i]) return false;
    }
    return true;
}

bool begins_with(const std::vector<Frame>& whole, const std::vector<Frame>& part) {
    return part.size() <= whole.size() && std::equal(part.begin(), part.end(), whole.begin(), same);
}

TEST_CASE("a plain log cut at every byte") {
    const std::string text = some_log();
    const std::vector<Frame> whole = read_text(text).frames;
    REQUIRE(whole.size() == 30);
    const TempFolder folder;
    const std::size_t header_end = text.find('\n') + 1;
    std::size_t row_begin = header_end;
    std::size_t rows_whole = 0;
    for (std::size_t size = header_end; size < text.size(); ++size) {
        const std::string cut = text.substr(0, size);
        const std::string row = cut.substr(row_begin);
        INFO("cut to " << size << " bytes, the last row is " << in_quotes(row));
        auto log = open_log(write_file(folder, "log.csv", cut), {});
        REQUIRE(log);
        const WholeLog part = read_to_end(**log);
        REQUIRE(begins_with(whole, part.frames));

        // RFC 4180 does not ask for the last line break: a row with all its cells is whole, even an empty
        // last one.
        const auto commas = std::count(row.begin(), row.end(), ',');
        const bool has_all_cells = row.ends_with("\n\"") || (commas == 8 && row.ends_with(","));
        const bool no_row = row.empty() || row == "\n";
        REQUIRE(part.frames.size() == rows_whole + (has_all_cells ? 1 : 0));
        REQUIRE(part.error.has_value() != (has_all_cells || no_row));
        if (row.ends_with("\n\"")) {
            ++rows_whole;
            row_begin = size;
        }
    }
    CHECK(rows_whole == 30);
}

void check_packed(const std::string& name) {
    const std::string text = some_log();
    const std::string content = packed(text, name);
    const std::vector<Frame> whole = read_text(text).frames;
    const TempFolder folder;
    std::size_t most = 0;
    for (std::size_t size = 0; size < content.size(); ++size) {
        INFO(name << " cut to " << size << " of " << content.size() << " bytes");
        auto log = open_log(write_file(folder, name, content.substr(0, size)), {});
        if (!log) {
            REQUIRE(most == 0);  // not even the header came; once it did, it does
            REQUIRE_FALSE(log.errors().at(0).message.empty());
            continue;
        }
        const WholeLog part = read_to_end(**log);
        REQUIRE(begins_with(whole, part.frames));
        REQUIRE(part.frames.size() >= most);
        most = part.frames.size();
        REQUIRE(part.error);
        REQUIRE(part.error->line >= 2 + 2 * part.frames.size());  // two lines a row, the header's one before
        REQUIRE_THAT(part.error->message, Catch::Contains("cut"));
    }
    CHECK(most == whole.size());  // only the end mark and checksum were missing
}

TEST_CASE("a gzip log cut at every byte") {
    check_packed("log.csv.gz");
}
TEST_CASE("a zstd log cut at every byte") {
    check_packed("log.csv.zst");
}

}  // namespace
}  // namespace holdfast::session
