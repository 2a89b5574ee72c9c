// SPDX-License-Identifier: MIT
// Every kind of bad CSV: the error has file, line and column and says what was expected, and all rows before
// it come.
#include <catch2/catch.hpp>

#include "tests/session/small_log.hpp"

namespace holdfast::session {
namespace {

using namespace holdfast::testing;
using Catch::Contains;

void check_place(const Error& error, std::uint64_t line, std::uint64_t column, const std::string& name) {
    INFO(to_string(error));
    CHECK_THAT(error.file, Catch::EndsWith("log.csv"));
    CHECK(error.line == line);
    CHECK(error.column == column);
    CHECK(error.name == name);
    CHECK_THAT(error.message, Contains("expected"));
}

std::string replaced(std::string text, const std::string& what, const std::string& by) {
    const std::size_t at = text.find(what);
    REQUIRE(at != std::string::npos);
    return text.replace(at, what.size(), by);
}

TEST_CASE("an error reads as file, line, column, what was wrong, what was expected") {
    const Error error{"outing.csv", 17, 4, "speed[m/s]", "found \"abc\"; expected a number or an empty cell"};
    CHECK(to_string(error) ==
          "outing.csv, line 17, column 4 \"speed[m/s]\": found \"abc\"; expected a number or an empty cell");
    CHECK(to_string(Error{"car.toml", 3, 0, "car.mass", "missing"}) ==
          "car.toml, line 3, key \"car.mass\": missing");
    CHECK(in_quotes("a\x01\n") == "\"a\\x01\\x0a\"");
    CHECK(in_quotes(std::string(100, 'x')).size() < 70);
}

TEST_CASE("each needed channel that the header lacks is named") {
    const std::string cells[] = {"t[s]",       "speed[m/s]", "load_fl[N]",       "load_fr[N]",
                                 "load_rl[N]", "load_rr[N]", "flap_position[-]", "ride_height_front[m]"};
    for (const std::string& cell : cells) {
        const Errors errors = header_errors(replaced(small_log({"0"}), cell, "other[x]"));
        REQUIRE(errors.size() == 1);
        check_place(errors[0], 1, 0, "");
        const std::string name = cell.substr(0, cell.find('['));
        CHECK_THAT(errors[0].message, Contains(name.starts_with("ride_height") ? "ride_height_*" : name));
    }
}

TEST_CASE("an unknown unit is an error that lists the known ones") {
    const Errors errors = header_errors(replaced(small_log({"0"}), "speed[m/s]", "speed[furlong/h]"));
    REQUIRE(errors.size() == 1);
    check_place(errors[0], 1, 2, "speed[furlong/h]");
    CHECK_THAT(errors[0].message, Contains("\"furlong/h\"") && Contains("m/s, km/h, mph, kn"));

    const Errors time = header_errors(replaced(small_log({"0"}), "t[s]", "t[h]"));
    REQUIRE(time.size() == 1);
    check_place(time[0], 1, 1, "t[h]");
    CHECK_THAT(time[0].message, Contains("s, ms, us, ns"));
}

TEST_CASE("a known channel without a unit is an error") {
    const Errors errors = header_errors(replaced(small_log({"0"}), "load_fl[N]", "load_fl"));
    REQUIRE(errors.size() == 1);
    check_place(errors[0], 1, 3, "load_fl");
    CHECK_THAT(errors[0].message, Contains("N, kN, lbf, kgf"));
}

TEST_CASE("a name twice in the header is an error, in whatever unit") {
    for (const char* twice : {"speed[m/s]", "speed[km/h]", "note", "flap_position[deg]"}) {
        const Errors errors = header_errors(small_log({"0"}, kSmallHeader + ",note," + twice, ",,"));
        REQUIRE(errors.size() == 1);
        check_place(errors[0], 1, 10, twice);
        CHECK_THAT(errors[0].message, Contains("twice"));
    }
}

TEST_CASE("one ride height more than there are slots for is an error") {
    std::string header = kSmallHeader;
    for (int i = 1; i < 9; ++i) header += ",ride_height_h" + std::to_string(i) + "[m]";
    const Errors errors = header_errors(header + "\n");
    REQUIRE(errors.size() == 1);
    check_place(errors[0], 1, 16, "ride_height_h8[m]");
}

TEST_CASE("all errors of a header come at once") {
    const Errors errors = header_errors("speed[x],speed[m/s],load_fl\n");
    CHECK(errors.size() == 4);  // twice, unit, no unit, missing
}

TEST_CASE("files that are no CSV log") {
    CHECK_THAT(header_errors("").at(0).message, Contains("empty") && Contains("expected a header"));
    CHECK_THAT(header_errors("\n\n").at(0).message, Contains("empty"));
    CHECK_THAT(header_errors("t[s];speed[m/s];lap[-]\n").at(0).message, Contains("commas"));
    CHECK_THAT(header_errors("\"t[s],speed[m/s]\n").at(0).message, Contains("quote"));
    const auto absent = open_log("no-such-file.csv", {});
    REQUIRE_FALSE(absent);
    CHECK(absent.errors().at(0).file == "no-such-file.csv");
}

// Two good rows, then `row` on line 4, then one that must not be reached.
Error error_in_row(const std::string& row, const LogOptions& options = {}) {
    const WholeLog log = read_text(small_log({"0", "0.5"}) + row + "\n9," + kSmallRow + "\n", options);
    CHECK(log.frames.size() == 2);
    REQUIRE(log.error);
    CHECK(log.error->line == 4);
    return *log.error;
}

TEST_CASE("text where a number belongs") {
    check_place(error_in_row("1,fast,1,2,3,4,0,0.03"), 4, 2, "speed[m/s]");
    check_place(error_in_row("1,50,1,2,3,4,0,0.03m"), 4, 8, "ride_height_front[m]");
    check_place(error_in_row("now,50,1,2,3,4,0,0.03"), 4, 1, "t[s]");
    CHECK_THAT(error_in_row("1,fast,1,2,3,4,0,0.03").message, Contains("\"fast\""));
    CHECK_THAT(error_in_row(std::string("1,\0\0,1,2,3,4,0,0.03", 20)).message, Contains("\\x00\\x00"));
}

TEST_CASE("a row without a time") {
    check_place(error_in_row(",50,1,2,3,4,0,0.03"), 4, 1, "t[s]");
    check_place(error_in_row("nan,50,1,2,3,4,0,0.03"), 4, 1, "t[s]");
    check_place(error_in_row("1e30,50,1,2,3,4,0,0.03"), 4, 1, "t[s]");
}

TEST_CASE("time running backwards") {
    const Error error = error_in_row("0.4," + kSmallRow);
    check_place(error, 4, 1, "t[s]");
    CHECK_THAT(error.message, Contains("\"0.4\"") && Contains("0.5") && Contains("backwards"));
}

TEST_CASE("too few and too many cells") {
    const Error few = error_in_row("1,50,1,2");
    check_place(few, 4, 4, "load_fr[N]");
    CHECK_THAT(few.message, Contains("4 cells") && Contains("expected 8"));
    const Error many = error_in_row("1,50,1,2,3,4,0,0.03,7");
    check_place(many, 4, 9, "");
    CHECK_THAT(many.message, Contains("9 cells") && Contains("expected 8"));
}

TEST_CASE("the header again in the middle of the file") {
    const Error error = error_in_row(kSmallHeader);
    check_place(error, 4, 1, "t[s]");
    CHECK_THAT(error.message, Contains("header"));
}

TEST_CASE("quotes out of place") {
    CHECK_THAT(error_in_row("1,5\"0,1,2,3,4,0,\"0.03").message, Contains("quote") && Contains("expected"));
    CHECK_THAT(error_in_row("1,\"50\"0,1,2,3,4,0,0.03").message, Contains("quote"));
    // A quote that is never closed takes the rest of the file.
    CHECK_THAT(error_in_row("1,\"50,1,2,3,4,0,0.03").message, Contains("closing quote"));
}

TEST_CASE("a quote that is never closed does not fill the memory") {
    std::string text = small_log({"0"}) + "1,\"50,1,2,3,4,0,0.03\n";
    for (int i = 0; i < 400'000; ++i) text += "9," + kSmallRow + "\n";
    const WholeLog log = read_text(text);
    CHECK(log.frames.size() == 1);
    REQUIRE(log.error);
    CHECK_THAT(log.error->message, Contains("4 MiB"));
}

TEST_CASE("a file cut in a row's middle") {
    const WholeLog log = read_text(small_log({"0", "0.5"}) + "1,50,1,2");
    CHECK(log.frames.size() == 2);
    REQUIRE(log.error);
    check_place(*log.error, 4, 4, "load_fr[N]");
    CHECK_THAT(log.error->message, Contains("the file ends"));

    const WholeLog in_last_cell = read_text(small_log({"0", "0.5"}) + "1,50,1,2,3,4,0,-");
    CHECK(in_last_cell.frames.size() == 2);
    REQUIRE(in_last_cell.error);
    CHECK_THAT(in_last_cell.error->message, Contains("in the middle of a row"));
}

TEST_CASE("after an error nothing more comes") {
    const TempFolder folder;
    auto log = open_log(write_file(folder, "log.csv", small_log({"1", "0", "2"})), {});
    REQUIRE(log);
    Frame frame;
    CHECK((*log)->next(frame));
    CHECK_FALSE((*log)->next(frame));
    CHECK_FALSE((*log)->next(frame));
    CHECK((*log)->error());
}

TEST_CASE("strict makes errors of what is otherwise counted") {
    LogOptions strict;
    strict.strict = true;
    check_place(error_in_row("0.5," + kSmallRow, strict), 4, 1, "t[s]");
    check_place(error_in_row("1,50,nan,2,3,4,0,0.03", strict), 4, 3, "load_fl[N]");
    check_place(error_in_row("1,50,1,2,3,4,inf,0.03", strict), 4, 7, "flap_position[-]");
    CHECK_THAT(error_in_row("0.5," + kSmallRow, strict).message, Contains("--strict"));
    CHECK_FALSE(read_text(small_log({"0", "1"}), strict).error);
}

}  // namespace
}  // namespace holdfast::session
