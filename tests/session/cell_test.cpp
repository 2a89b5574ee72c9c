// SPDX-License-Identifier: MIT
#include "estimator/session/cell.hpp"

#include <catch2/catch.hpp>
#include <cmath>
#include <limits>
#include <random>

namespace holdfast::session {
namespace {

using Status = TimeCell::Status;

std::int64_t time_of(std::string_view text, int exponent) {
    INFO(text);
    const TimeCell cell = parse_time(text, exponent);
    REQUIRE(cell.status == Status::ok);
    return cell.time_ns;
}

TEST_CASE("time is read to the nanosecond in every unit") {
    CHECK(time_of("0", 9) == 0);
    CHECK(time_of("0.0025", 9) == 2'500'000);
    CHECK(time_of("-1.5", 9) == -1'500'000'000);
    CHECK(time_of("12.5", 6) == 12'500'000);
    CHECK(time_of("7", 3) == 7'000);
    CHECK(time_of("7", 0) == 7);
    CHECK(time_of(" +2.5 ", 9) == 2'500'000'000);
    CHECK(time_of("2.5e-3", 9) == 2'500'000);
    CHECK(time_of(".5", 9) == 500'000'000);
    CHECK(time_of("5.", 9) == 5'000'000'000);
    // Seconds since 1970 to the nanosecond: more digits than a double has.
    CHECK(time_of("1700000000.123456789", 9) == 1'700'000'000'123'456'789);
}

TEST_CASE("time is rounded to the nearest nanosecond") {
    CHECK(time_of("0.0000000014", 9) == 1);
    CHECK(time_of("0.0000000015", 9) == 2);
    CHECK(time_of("-0.0000000015", 9) == -2);
    CHECK(time_of("0.00000000149999", 9) == 1);
    CHECK(time_of("3.4", 0) == 3);
}

TEST_CASE("what is no time is told from what is no time that fits") {
    for (const char* text : {"", " ", "abc", "1.2.3", "1s", "-", ".", "0x10", "1,5"}) {
        INFO(text);
        CHECK(parse_time(text, 9).status == Status::not_a_number);
    }
    for (const char* text : {"nan", "inf", "-inf", "1e300", "9223372037", "99999999999999999999"}) {
        INFO(text);
        CHECK(parse_time(text, 9).status == Status::out_of_range);
    }
}

TEST_CASE("time survives the way to text and back") {
    const unsigned seed = 20240117;
    INFO("seed " << seed);
    std::mt19937_64 random(seed);
    for (int i = 0; i < 20'000; ++i) {
        const auto time_ns = static_cast<std::int64_t>(random()) >> (random() % 60);
        INFO(time_ns << " as " << time_text_s(time_ns));
        REQUIRE(time_of(time_text_s(time_ns), 9) == time_ns);
    }
    CHECK(time_text_s(2'500'000) == "0.0025");
    CHECK(time_text_s(-1'000'000'000) == "-1");
    CHECK(time_text_s(std::numeric_limits<std::int64_t>::max()) == "9223372036.854775807");
}

TEST_CASE("a mapped time is scaled and shifted before it is taken in its unit") {
    const TimeCell cell = parse_mapped_time("300", {.scale = 0.01, .offset = -1.0}, 9);
    REQUIRE(cell.status == Status::ok);
    CHECK(cell.time_ns == 2'000'000'000);
}

TEST_CASE("numbers") {
    CHECK(parse_number("1.5") == 1.5);
    CHECK(parse_number(" -1.5e3\t") == -1500.0);
    CHECK(parse_number("+2") == 2.0);
    CHECK(std::isnan(parse_number("nan").value()));
    CHECK(std::isnan(parse_number("NaN").value()));
    CHECK(parse_number("-inf") == -std::numeric_limits<double>::infinity());
    CHECK(parse_number("1e999") == std::numeric_limits<double>::infinity());
    CHECK(parse_number("1e-999") == 0.0);
    for (const char* text : {"", "  ", "abc", "1.5x", "1 5", "--1", "+-1", "+", "0x1F", "1.5.", "NA"}) {
        INFO(text);
        CHECK_FALSE(parse_number(text));
    }
}

}  // namespace
}  // namespace holdfast::session
