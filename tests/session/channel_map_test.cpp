// SPDX-License-Identifier: MIT
#include "estimator/session/channel_map.hpp"

#include <catch2/catch.hpp>

#include "tests/session/small_log.hpp"

namespace holdfast::session {
namespace {

using namespace holdfast::testing;
using Catch::Contains;

Result<ChannelMap> read_map(const std::string& text) {
    const TempFolder folder;
    return read_channel_map(write_file(folder, "map.toml", text));
}

LogOptions mapped_by(const std::string& text) {
    auto map = read_map(text);
    if (!map) FAIL(to_string(map.errors()));
    LogOptions options;
    options.channels = *map;
    return options;
}

const std::string kForeignLog =
    "Time,GroundSpeed,load_fl[N],load_fr[N],load_rl[N],load_rr[N],Wing [deg],Ride F[mm]\n"
    "1500,180,1,2,3,4,90,30\n"
    "1600,181,1,2,3,4,,30\n";
const std::string kForeignMap =
    "[channels]\n"
    "t = { column = \"Time\", unit = \"ms\" }\n"
    "speed = { column = \"GroundSpeed\", unit = \"km/h\", scale = 2.0, offset = 36.0 }\n"
    "flap_position = { column = \"Wing\" }\n"
    "ride_height_front = { column = \"Ride F[mm]\", unit = \"mm\" }\n";

TEST_CASE("a log with other names is read by a channel map") {
    const WholeLog log = read_text(kForeignLog, mapped_by(kForeignMap));
    REQUIRE_FALSE(log.error);
    REQUIRE(log.frames.size() == 2);
    CHECK(log.frames[0].time_ns == 1'500'000'000);
    CHECK(log.frames[0].get(Channel::speed) == Approx((2.0 * 180.0 + 36.0) / 3.6));
    CHECK(log.frames[0].get(Channel::flap_angle) == Approx(1.5707963267948966));
    CHECK(log.frames[0].get(ride_height_channel(0)) == Approx(0.030));
    CHECK(log.frames[0].get(Channel::load_rr) == 4.0);  // its own name still counts
    CHECK(log.info.ride_height_names == std::vector<std::string>{"front"});
    CHECK(log.left_out.empty());
}

TEST_CASE("time may be scaled and shifted") {
    const LogOptions options =
        mapped_by("channels.t = { column = \"tick\", unit = \"s\", scale = 0.01, offset = -1.0 }\n");
    const WholeLog log = read_text(small_log({"100", "150"}, "tick" + kSmallHeader.substr(4)), options);
    REQUIRE_FALSE(log.error);
    REQUIRE(log.frames.size() == 2);
    CHECK(log.frames[0].time_ns == 0);
    CHECK(log.frames[1].time_ns == 500'000'000);
}

TEST_CASE("the map goes before a column's own name, which is then left out") {
    const LogOptions options = mapped_by("[channels]\nspeed = { column = \"gps\", unit = \"km/h\" }\n");
    const WholeLog log = read_text(small_log({"0"}, kSmallHeader + ",gps", ",36"), options);
    REQUIRE(log.frames.size() == 1);
    CHECK(log.frames[0].get(Channel::speed) == Approx(10.0));
    CHECK(log.left_out == std::vector<std::string>{"speed[m/s]"});
}

void check_map_error(const std::string& text, std::uint64_t line, const std::string& key,
                     const std::string& expected) {
    INFO(text);
    const auto map = read_map(text);
    REQUIRE_FALSE(map);
    REQUIRE(map.errors().size() == 1);
    const Error& error = map.errors()[0];
    INFO(to_string(error));
    CHECK_THAT(error.file, Catch::EndsWith("map.toml"));
    CHECK(error.line == line);
    CHECK(error.name == key);
    CHECK_THAT(error.message, Contains(expected));
}

TEST_CASE("every error of a channel map names key and line") {
    check_map_error("[channels]\nspeeed = { column = \"v\" }\n", 2, "channels.speeed",
                    "no channel of this name");
    check_map_error("[channels]\nspeed = \"v\"\n", 2, "channels.speed", "expected channel = {");
    check_map_error("[channels]\nspeed = { unit = \"m/s\" }\n", 2, "channels.speed.column", "missing");
    check_map_error("[channels]\nspeed = { column = \"v\", unit = \"N\" }\n", 2, "channels.speed.unit",
                    "m/s, km/h, mph, kn");
    check_map_error("[channels]\nt = { column = \"v\", unit = \"h\" }\n", 2, "channels.t.unit",
                    "s, ms, us, ns");
    check_map_error("[channels]\nspeed = { column = \"v\", unit = 3 }\n", 2, "channels.speed.unit", "m/s");
    check_map_error("[channels]\nspeed = { column = \"v\", scale = \"2\" }\n", 2, "channels.speed.scale",
                    "expected a finite number");
    check_map_error("[channels]\nspeed = { column = \"v\", scale = 0 }\n", 2, "channels.speed.scale",
                    "other than 0");
    check_map_error("[channels]\nspeed = { column = \"v\", offset = nan }\n", 2, "channels.speed.offset",
                    "finite");
    check_map_error("[channels]\nspeed = { column = \"v\", gain = 1 }\n", 2, "channels.speed.gain",
                    "not known");
    check_map_error("\n[chanels]\n", 2, "chanels", "[channels]");
    check_map_error("channels = 3\n", 1, "channels", "[channels]");
    check_map_error("[channels]\nspeed = {\n", 2, "", "not TOML");
}

TEST_CASE("all errors of a channel map come at once") {
    const auto map = read_map("[channels]\nspeed = { column = 1 }\nload = { column = \"x\" }\nlap = 3\n");
    REQUIRE_FALSE(map);
    CHECK(map.errors().size() == 4);  // column no text and so missing; unknown; no table
}

TEST_CASE("a mapped column that the log lacks is an error that names key, line and log") {
    const Errors errors = header_errors(
        small_log({"0"}), mapped_by("[channels]\n\nspeed = { column = \"v\", unit = \"m/s\" }\n"));
    REQUIRE_FALSE(errors.empty());
    CHECK_THAT(errors[0].file, Catch::EndsWith("map.toml"));
    CHECK(errors[0].line == 3);
    CHECK(errors[0].name == "channels.speed");
    CHECK_THAT(errors[0].message, Contains("log.csv") && Contains("expected one of"));
}

TEST_CASE("a mapped column without any unit, or with one that the channel does not know, is an error") {
    const std::string log = small_log({"0"}, kSmallHeader + ",v,w[N]", ",1,2");
    const Errors none = header_errors(log, mapped_by("[channels]\nlap = { column = \"v\" }\n"));
    REQUIRE(none.size() == 1);
    CHECK(none[0].line == 2);
    CHECK_THAT(none[0].message, Contains("no unit"));
    const Errors unknown = header_errors(log, mapped_by("[channels]\nlap = { column = \"w\" }\n"));
    REQUIRE(unknown.size() == 1);
    CHECK_THAT(unknown[0].message, Contains("\"N\"") && Contains("expected one of -"));
}

}  // namespace
}  // namespace holdfast::session
