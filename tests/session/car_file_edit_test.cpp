// SPDX-License-Identifier: MIT
#include "estimator/session/car_file_edit.hpp"

#include <catch2/catch.hpp>
#include <fstream>

#include "tests/temp_folder.hpp"

namespace {

using namespace holdfast;

session::Result<std::string> changed(const std::string& text,
                                     const std::vector<session::CarFileChange>& changes) {
    const testing::TempFolder folder;
    const auto path = (folder / "car.toml").string();
    std::ofstream(path) << text;
    return session::changed_car_file(path, changes);
}

const std::vector<session::CarFileChange> kRear{{"rear", "wheel_rate", {158e3, 3e3}}};

}  // namespace

TEST_CASE("a changed line keeps its comment and says what stood there") {
    const auto text = changed(
        "# mine\n[front]\nwheel_rate = 1.7e5\n[rear]\n  wheel_rate=170000 # dyno\ntyre_rate = 3e5\n", kRear);
    REQUIRE(text);
    CHECK(*text ==
          "# mine\n[front]\nwheel_rate = 1.7e5\n[rear]\n"
          "  wheel_rate=158000 # dyno; wheel_rate was 170000\n"
          "  wheel_rate_sd = 3000  # was not given\n"
          "tyre_rate = 3e5\n");
}

TEST_CASE("an uncertainty that is there is changed in its place") {
    const auto text = changed("[rear]\nwheel_rate_sd = 5000\nwheel_rate = 170000\n", kRear);
    REQUIRE(text);
    CHECK(*text ==
          "[rear]\nwheel_rate_sd = 3000  # wheel_rate_sd was 5000\n"
          "wheel_rate = 158000  # wheel_rate was 170000\n");
}

TEST_CASE("a table within braces, a dotted key, a quoted key, line ends of Windows") {
    CHECK(*changed("rear = { wheel_rate = 170000, tyre_rate = 3e5 }\n", kRear) ==
          "rear = { wheel_rate = 158000, wheel_rate_sd = 3000, tyre_rate = 3e5 }"
          "  # wheel_rate was 170000; wheel_rate_sd was not given\n");
    CHECK(*changed("rear.wheel_rate = 170000\n", kRear) ==
          "rear.wheel_rate = 158000  # wheel_rate was 170000\n"
          "rear.wheel_rate_sd = 3000  # was not given\n");
    CHECK(*changed("[rear]\n\"wheel_rate\" = 170000\n", kRear) ==
          "[rear]\n\"wheel_rate\" = 158000  # wheel_rate was 170000\n"
          "wheel_rate_sd = 3000  # was not given\n");
    CHECK(*changed("[rear]\r\nwheel_rate = 170000\r\n", kRear) ==
          "[rear]\r\nwheel_rate = 158000  # wheel_rate was 170000\r\n"
          "wheel_rate_sd = 3000  # was not given\r\n");
}

TEST_CASE("a comment that speaks of the key is not taken for it; no change leaves the text as it was") {
    const std::string text = "[rear]  # wheel_rate = 1 once\nwheel_rate = 170000";
    CHECK(*changed(text, {}) == text);
    CHECK(*changed(text, kRear) ==
          "[rear]  # wheel_rate = 1 once\nwheel_rate = 158000  # wheel_rate was 170000\n"
          "wheel_rate_sd = 3000  # was not given");
}

TEST_CASE("a key that is not there is an error that names it") {
    const auto text = changed("[rear]\ntyre_rate = 3e5\n", kRear);
    REQUIRE_FALSE(text);
    CHECK(text.errors().front().name == "rear.wheel_rate");
}
