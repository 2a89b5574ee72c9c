// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <cmath>

#include "tests/session/small_log.hpp"

namespace holdfast::session {
namespace {

using namespace holdfast::testing;

TEST_CASE("rows become frames in SI, columns in any order") {
    const WholeLog log = read_text(
        "load_rr[kN],t[ms],flap_position[%],speed[km/"
        "h],ride_height_front[mm],load_fl[N],load_fr[lbf],load_rl[kgf],"
        "air_temperature[degC],ride_height_rear_left[in]\r\n"
        "2.5,10,40,180,31.5,1000,100,200,20,2\r\n"
        "2.6,12.5,,,31.6,,,,,\r\n");
    REQUIRE_FALSE(log.error);
    REQUIRE(log.frames.size() == 2);
    const Frame& first = log.frames[0];
    CHECK(first.time_ns == 10'000'000);
    CHECK(first.get(Channel::load_rr) == 2500.0);
    CHECK(first.get(Channel::flap_position) == Approx(0.4));
    CHECK(first.get(Channel::speed) == Approx(50.0));
    CHECK(first.get(Channel::load_fl) == 1000.0);
    CHECK(first.get(Channel::load_fr) == Approx(444.82216));
    CHECK(first.get(Channel::load_rl) == Approx(1961.33));
    CHECK(first.get(Channel::air_temperature) == Approx(293.15));
    CHECK(log.info.ride_height_names == std::vector<std::string>{"front", "rear_left"});
    CHECK(first.get(ride_height_channel(0)) == Approx(0.0315));
    CHECK(first.get(ride_height_channel(1)) == Approx(0.0508));
    CHECK(first.present == log.info.channels);

    const Frame& second = log.frames[1];
    CHECK(second.time_ns == 12'500'000);
    CHECK(second.has(Channel::load_rr));
    CHECK(second.has(ride_height_channel(0)));
    CHECK(__builtin_popcountll(second.present) == 2);  // blank cells are no samples
}

TEST_CASE("the forms of RFC 4180") {
    const std::string header =
        "t[s],speed[m/s],load_fl[N],load_fr[N],load_rl[N],load_rr[N],flap_position[-],"
        "ride_height_front[m],note";
    SECTION("line breaks LF or CRLF, the last one left out, a byte-order mark, empty lines") {
        for (const char* end : {"\n", "\r\n"}) {
            std::string text =
                "\xef\xbb\xbf" + header + end + "0," + kSmallRow + ",a" + end + end + "1," + kSmallRow;
            const WholeLog log = read_text(text + ",b");
            CHECK_FALSE(log.error);
            CHECK(log.frames.size() == 2);
        }
    }
    SECTION("quoted cells with commas, quotes and line breaks in them; lines are still counted") {
        const std::string text = "\"t[s]\"" + header.substr(4) +
                                 "\n\"0.5\",\"5\",1,2,3,4,0,0.03,\"a, \"\"b\"\"\nc\"\n" +
                                 "1.5,5,1,2,3,4,0,0.03,\"\"\n" + "2.5,five,1,2,3,4,0,0.03,\"\"\n";
        const WholeLog log = read_text(text);
        REQUIRE(log.frames.size() == 2);
        CHECK(log.frames[0].time_ns == 500'000'000);
        CHECK(log.frames[0].get(Channel::speed) == 5.0);
        REQUIRE(log.error);
        CHECK(log.error->line == 5);
    }
    SECTION("blanks around names, units and numbers") {
        const WholeLog log = read_text(" t [s]" + header.substr(4) + "\n 0 , 5 ,1,2,3,4,\t,0.03,\n");
        REQUIRE_FALSE(log.error);
        REQUIRE(log.frames.size() == 1);
        CHECK(log.frames[0].get(Channel::speed) == 5.0);
        CHECK_FALSE(log.frames[0].has(Channel::flap_position));
    }
}

TEST_CASE("columns that nobody knows are left out and listed") {
    const WholeLog log = read_text(small_log({"0"}, kSmallHeader + ",oil_pressure[bar],note,", ",3,fine,"));
    CHECK_FALSE(log.error);
    CHECK(log.frames.size() == 1);
    CHECK(log.left_out == std::vector<std::string>{"oil_pressure[bar]", "note", "column 11 (no name)"});
}

TEST_CASE("a flap position in degrees comes as an angle in radians") {
    const WholeLog log = read_text(
        "t[s],speed[m/"
        "s],load_fl[N],load_fr[N],load_rl[N],load_rr[N],flap_position[deg],ride_height_front[m]\n"
        "0,50,1,2,3,4,90,0.03\n");
    REQUIRE(log.frames.size() == 1);
    CHECK(log.frames[0].get(Channel::flap_angle) == Approx(1.5707963267948966));
    CHECK_FALSE(log.frames[0].has(Channel::flap_position));
}

TEST_CASE("numbers that are not finite are delivered for the engine to count") {
    const WholeLog log = read_text(kSmallHeader + "\n0,nan,inf,-inf,NaN,1e999,0,0.03\n");
    REQUIRE_FALSE(log.error);
    REQUIRE(log.frames.size() == 1);
    const Frame& frame = log.frames[0];
    CHECK(std::isnan(frame.get(Channel::speed)));
    CHECK(std::isinf(frame.get(Channel::load_fl)));
    CHECK(frame.get(Channel::load_fr) < 0);
    CHECK(std::isnan(frame.get(Channel::load_rl)));
    CHECK(std::isinf(frame.get(Channel::load_rr)));
    CHECK(frame.present == log.info.channels);
}

TEST_CASE("a time that repeats is delivered for the engine to count") {
    const WholeLog log = read_text(small_log({"0", "0.5", "0.5", "1"}));
    CHECK_FALSE(log.error);
    REQUIRE(log.frames.size() == 4);
    CHECK(log.frames[1].time_ns == log.frames[2].time_ns);
}

TEST_CASE("a row with a time and nothing else is a frame without samples") {
    const WholeLog log = read_text(kSmallHeader + "\n0,,,,,,,\n");
    REQUIRE(log.frames.size() == 1);
    CHECK(log.frames[0].present == 0);
}

TEST_CASE("rows longer than the read buffer are read") {
    const std::string note(600'000, 'x');
    const WholeLog log = read_text(small_log({"0", "1", "2"}, kSmallHeader + ",note", "," + note));
    CHECK_FALSE(log.error);
    CHECK(log.frames.size() == 3);
}

TEST_CASE("eight ride heights are read, each in its own slot") {
    std::string header = kSmallHeader;
    std::string cells;
    for (int i = 1; i < 8; ++i) {
        header += ",ride_height_h" + std::to_string(i) + "[m]";
        cells += ",0.0" + std::to_string(i);
    }
    const WholeLog log = read_text(small_log({"0"}, header, cells));
    REQUIRE(log.frames.size() == 1);
    REQUIRE(log.info.ride_height_names.size() == 8);
    CHECK(log.info.ride_height_names[7] == "h7");
    CHECK(log.frames[0].get(ride_height_channel(7)) == 0.07);
}

}  // namespace
}  // namespace holdfast::session
