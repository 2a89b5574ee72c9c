// SPDX-License-Identifier: MIT
#include "estimator/session/car_file.hpp"

#include <algorithm>
#include <catch2/catch.hpp>
#include <numbers>
#include <sstream>

#include "estimator/session/car_keys.hpp"
#include "tests/session/small_car.hpp"
#include "tests/session/small_log.hpp"

namespace holdfast::session {
namespace {

using namespace holdfast::testing;
using Catch::Contains;

Result<CarFile> read_car(const std::string& text) {
    const TempFolder folder;
    return read_car_file(write_file(folder, "car.toml", text));
}

CarFile good_car(const std::string& text) {
    auto car = read_car(text);
    if (!car) FAIL(to_string(car.errors()));
    return *car;
}

// kSmallCar with the line that begins with `begin` replaced.
std::string with_line(const std::string& begin, const std::string& line) {
    const std::size_t at = kSmallCar.find("\n" + begin) + 1;
    REQUIRE(at > 0);
    return kSmallCar.substr(0, at) + line + kSmallCar.substr(kSmallCar.find('\n', at));
}

std::uint64_t line_in(const std::string& text, const std::string& part) {
    const std::size_t at = text.find(part);
    REQUIRE(at != std::string::npos);
    return static_cast<std::uint64_t>(
               std::count(text.begin(), text.begin() + static_cast<std::ptrdiff_t>(at), '\n')) +
           1;
}

TEST_CASE("a car file is read into SI") {
    const CarFile file = good_car(kSmallCar);
    const core::Car& car = file.car;
    CHECK(file.name == "Number 12");
    CHECK(car.mass_kg.value == 780.0);
    CHECK(car.fuel_per_lap_kg.value == 1.7);
    CHECK(car.wheelbase_m == 3.4);
    CHECK(car.front_weight_share.value == 0.455);
    CHECK(car.cg_height_m.value == 0.3);
    CHECK(car.pitch_inertia_kgm2.value == 1100.0);
    CHECK(car.roll_inertia_kgm2.value == 200.0);
    CHECK(car.rolling_resistance.value == 0.015);
    CHECK(car.front.track_m == 1.6);
    CHECK(car.front.unsprung_mass_kg.value == 19.0);
    CHECK(car.front.wheel_rate_npm.value == 231000.0);
    CHECK(car.front.anti_roll_rate_npm.value == 100000.0);
    CHECK(car.front.damping_nspm.value == 6800.0);
    CHECK(car.front.tyre_rate_npm.value == 301000.0);
    CHECK(car.front.anti_brake_share.value == 0.18);
    CHECK(car.rear.track_m == 1.55);
    CHECK(car.rear.unsprung_mass_kg.value == 22.0);
    CHECK(car.rear.wheel_rate_npm.value == 162000.0);
    CHECK(car.rear.anti_roll_rate_npm.value == 30000.0);
    CHECK(car.rear.damping_nspm.value == 4300.0);
    CHECK(car.rear.tyre_rate_npm.value == 322000.0);
    CHECK(car.rear.anti_brake_share.value == 0.12);
    CHECK(car.rear.anti_squat_share.value == 0.2);
    CHECK(car.flap_chord_m == 0.24);
    CHECK_FALSE(car.flap_angles_known);
    CHECK(car.tyre_growth_s2pm.value == 3.0e-7);
    REQUIRE(car.ride_height_count == 3);
    CHECK(file.ride_height_names ==
          std::vector<std::string>{"rear_left", "front", "rear_right"});  // file's order
    CHECK(car.ride_height[0].static_m.value == 0.098);
    CHECK(car.ride_height[0].x_m == -3.6);
    CHECK(car.ride_height[0].y_m == 0.45);
    CHECK(car.ride_height[1].x_m == 0.25);
}

TEST_CASE("standard uncertainties where the file gives none are those of the contract") {
    const core::Car car = good_car(kSmallCar).car;
    const auto share = [](const core::Quantity& q) { return Approx(q.sd / q.value); };
    CHECK(0.005 == share(car.mass_kg));
    CHECK(0.10 == share(car.fuel_per_lap_kg));
    CHECK(0.004 == share(car.front_weight_share));
    CHECK(0.05 == share(car.cg_height_m));
    CHECK(0.10 == share(car.pitch_inertia_kgm2));
    CHECK(0.10 == share(car.roll_inertia_kgm2));
    CHECK(0.10 == share(car.rolling_resistance));
    for (const core::Axle& axle : {car.front, car.rear}) {
        CHECK(0.05 == share(axle.unsprung_mass_kg));
        CHECK(0.03 == share(axle.wheel_rate_npm));
        CHECK(0.05 == share(axle.anti_roll_rate_npm));
        CHECK(0.15 == share(axle.damping_nspm));
        CHECK(0.05 == share(axle.tyre_rate_npm));
        CHECK(axle.anti_brake_share.sd == 0.03);
    }
    CHECK(car.rear.anti_squat_share.sd == 0.03);
    CHECK(0.20 == share(car.tyre_growth_s2pm));
    CHECK(car.ride_height[0].static_m.sd == 0.0005);
}

TEST_CASE("_sd beside any number is its uncertainty") {
    // Every number of the table: no key's sd may be unknown, and each that the car has room for arrives
    // there.
    for (const CarKey& key : car_keys()) {
        if (key.table == kSensorTable) continue;
        const std::string name(key.key);
        INFO(key.table << "." << name);
        const std::string header = "[" + std::string(key.table) + "]";
        std::string text = kSmallCar;
        if (key.need == CarKey::Need::optional) {  // both flap angles
            text.insert(text.find("[flap]") + 7, "closed_angle = 30\nopen_angle = 10\n");
        }
        text.insert(text.find(header) + header.size() + 1, name + "_sd = 1e-7\n");
        CHECK(read_car(text));
    }
    CHECK(good_car(with_line("mass", "mass = 780\nmass_sd = 2.5")).car.mass_kg.sd == 2.5);
    CHECK(good_car(with_line("mass", "mass = 780\nmass_sd = 0")).car.mass_kg.sd == 0.0);
    const CarFile file = good_car(
        with_line("front = ", "front = { static = 0.045, static_sd = 0.001, x = 0.25, x_sd = 0.01, y = 0 }"));
    CHECK(file.car.ride_height[1].static_m.sd == 0.001);
}

TEST_CASE("keys that may be absent have the contract's defaults") {
    for (const char* key : {"fuel_per_lap", "anti_dive", "anti_lift", "anti_squat", "name"}) {
        INFO(key);
        CHECK(read_car(with_line(std::string(key) + " = ", "")));
    }
    const core::Car car = good_car(with_line("anti_squat", "")).car;
    CHECK(car.rear.anti_squat_share.value == 0.0);
    CHECK(car.rear.anti_squat_share.sd == 0.03);
    CHECK(good_car(with_line("fuel_per_lap", "")).car.fuel_per_lap_kg.value == 0.0);
}

TEST_CASE("flap angles are in degrees in the file") {
    const core::Car car =
        good_car(with_line("chord", "chord = 0.24\nclosed_angle = 45\nopen_angle = 9\nopen_angle_sd = 1.8"))
            .car;
    CHECK(car.flap_angles_known);
    CHECK(car.flap_closed_angle_rad.value == Approx(std::numbers::pi / 4));
    CHECK(car.flap_closed_angle_rad.sd == Approx(0.3 * std::numbers::pi / 180));
    CHECK(car.flap_open_angle_rad.value == Approx(std::numbers::pi / 20));
    CHECK(car.flap_open_angle_rad.sd == Approx(std::numbers::pi / 100));
}

TEST_CASE("tables and dotted keys are the same to the reader") {
    const std::string text = with_line("front = ", "front.static = 0.045\nfront.x = 0.25\nfront.y = 0.0");
    CHECK(good_car(text).car.ride_height[1].static_m.value == 0.045);
}

void check_error(const std::string& text, const std::string& at, const std::string& key,
                 const std::string& message) {
    const auto car = read_car(text);
    REQUIRE_FALSE(car);
    INFO(to_string(car.errors()));
    REQUIRE(car.errors().size() == 1);
    const Error& error = car.errors()[0];
    CHECK_THAT(error.file, Catch::EndsWith("car.toml"));
    CHECK(error.line == line_in(text, at));
    CHECK(error.name == key);
    CHECK_THAT(error.message, Contains(message));
    CHECK_THAT(error.message, Contains("expected"));
}

TEST_CASE("each needed key that is absent is an error") {
    for (const CarKey& key : car_keys()) {
        if (key.need != CarKey::Need::needed || key.table == kSensorTable) continue;
        const std::string table = "[" + std::string(key.table) + "]";
        std::string text = kSmallCar;
        const std::size_t begin = text.find("\n" + std::string(key.key) + " =", text.find(table)) + 1;
        text.erase(begin, text.find('\n', begin) + 1 - begin);
        check_error(text, table, std::string(key.table) + "." + std::string(key.key), "missing");
    }
    const auto front = [](const std::string& content) {
        return with_line("front = ", "front = { " + content + " }");
    };
    check_error(front("x = 0.25, y = 0.0"), "front = {", "ride_height.front.static", "missing");
    check_error(front("static = 0.045, y = 0.0"), "front = {", "ride_height.front.x", "missing");
    check_error(front("static = 0.045, x = 0.25"), "front = {", "ride_height.front.y", "missing");
}

TEST_CASE("each number out of range, of the wrong type or not finite is an error") {
    for (const CarKey& key : car_keys()) {
        if (key.table == kSensorTable || key.need == CarKey::Need::optional) continue;
        const std::string name(key.key);
        const std::string path = std::string(key.table) + "." + name;
        const auto check = [&](const std::string& value, const std::string& message) {
            std::string text = kSmallCar;
            const std::size_t table = text.find("[" + std::string(key.table) + "]");
            const std::size_t begin = text.find("\n" + name + " =", table) + 1;
            const std::string line = name + " = " + value + "  # changed";
            text.replace(begin, text.find('\n', begin) - begin, line);
            check_error(text, line, path, message);
        };
        check(number_text(key.least - 1.0), "expected a number from " + number_text(key.least));
        check(number_text(key.most + 1.0), "to " + number_text(key.most));
        check("nan", "nan");
        check("\"heavy\"", "found the text \"heavy\"");
        check("true", "found a value of type boolean");
        check("[1, 2]", "found a value of type array");
    }
}

TEST_CASE("what the file should not have is an error with key and line") {
    check_error(with_line("mass", "mass = 780\nmas = 3"), "mas = 3", "car.mas",
                "not known; expected one of name, mass");
    check_error(with_line("mass", "mass = 780\nmass_sd = -1"), "mass_sd", "car.mass_sd", "from 0 to");
    check_error(with_line("name", "name = 12"), "name = 12", "car.name", "expected a text");
    check_error(with_line("name", "name = \"x\"\nname_sd = 1"), "name_sd", "car.name_sd", "not known");
    check_error(kSmallCar + "[wing]\nchord = 1\n", "[wing]", "wing", "not known; expected a table");
    check_error("answer = 42\n" + kSmallCar, "answer", "answer", "not known; expected a table");
    check_error(with_line("front = ", "front = { static = 0.045, x = 0.25, y = 0.0, z = 1 }"), "z = 1",
                "ride_height.front.z", "static, x, y");
    check_error(with_line("tyre_growth", "tyre_growth = 3e-7\nmiddle = 0.04"), "middle", "ride_height.middle",
                "NAME = { static, x, y }");
    check_error(with_line("anti_squat = ", "anti_squat = 0.2\nanti_dive = 0.2"), "anti_dive = 0.2",
                "rear.anti_dive", "not known");
    check_error(with_line("chord", "chord = 0.24\nopen_angle = 9"), "open_angle", "flap.closed_angle",
                "missing");
    check_error(with_line("chord", "chord = 0.24\nopen_angle_sd = 9"), "open_angle_sd", "flap.open_angle_sd",
                "no open_angle beside it");
    check_error(with_line("chord", "chord = 0.24\nclosed_angle = 9\nopen_angle = 9"), "open_angle",
                "flap.open_angle", "the same as");
    check_error(with_line("front = ", "front = { static = 45, x = 0.25, y = 0.0 }"), "static = 45",
                "ride_height.front.static", "a number from -0.1 to 1 m");
    check_error(with_line("tyre_growth", "tyre_growth = { static = 0.04, x = 0, y = 0 }"), "tyre_growth",
                "ride_height.tyre_growth", "found a table");
    check_error(with_line("chord", "chord.length = 0.24"), "chord.length", "flap.chord", "found a table");
}

TEST_CASE("parts that weigh more than the car are an error") {
    std::string text = with_line("mass", "mass = 290");
    text.replace(text.find("unsprung_mass = 22"), 18, "unsprung_mass = 150");
    check_error(text, "mass = 290", "car.mass", "338 kg");
}

TEST_CASE("sensors: none at all, and more than there are slots for") {
    std::string text = kSmallCar;
    for (const char* sensor : {"rear_left", "front", "rear_right"}) {
        const std::size_t begin = text.find(std::string(sensor) + " = {");
        text.erase(begin, text.find('\n', begin) + 1 - begin);
    }
    check_error(text, "[ride_height]", "ride_height", "no sensor");
    text += "h0 = { static = 0.045, x = 0.25, y = 0.0 }\n";
    CHECK(read_car(text));
    for (int i = 1; i <= 8; ++i)
        text += "h" + std::to_string(i) + " = { static = 0.045, x = 0.25, y = 0.0 }\n";
    check_error(text, "h8", "ride_height.h8", "8 at most");
}

TEST_CASE("files that are no car file") {
    const auto absent = read_car_file("no-such-car.toml");
    REQUIRE_FALSE(absent);
    CHECK(absent.errors().at(0).file == "no-such-car.toml");
    const auto broken = read_car("[car]\nmass = = 3\n");
    REQUIRE_FALSE(broken);
    CHECK(broken.errors().at(0).line == 2);
    CHECK_THAT(broken.errors().at(0).message, Contains("not TOML"));
    const auto twice = read_car("[car]\nmass = 3\nmass = 4\n");
    REQUIRE_FALSE(twice);
    CHECK(twice.errors().at(0).line == 3);
    CHECK_FALSE(read_car(""));
}

TEST_CASE("characters beyond ASCII belong in comments and texts") {
    const std::string text = with_line("name", "name = \"№ 12 \\\" µ\"  # Träger, µ");
    CHECK(good_car(text).name == "№ 12 \" µ");
    CHECK(good_car("\xef\xbb\xbf" + kSmallCar).name == "Number 12");
    CHECK(good_car(with_line("name", "name = 'µ'\nfuel_per_lap_sd = 0.1 # \"")).name == "µ");
    CHECK(good_car(with_line("name", "name = \"\"\"\nµ \"µ\" \"\"\"")).name == "µ \"µ\" ");
    for (const char* line :
         {"mass = 780 µ", "µ = 3", "mass = 780\u00a0", "name = \"x\" §", "name = \"x§\n§ = 1"}) {
        INFO(line);
        const auto car = read_car(with_line("mass", line));
        REQUIRE_FALSE(car);
        REQUIRE(car.errors().size() == 1);
        CHECK(car.errors()[0].line >= line_in(kSmallCar, "mass"));
        CHECK_THAT(car.errors()[0].message, Contains("not TOML"));
    }
}

TEST_CASE("all errors of a car file come at once, in the order of their lines") {
    std::string text = with_line("mass", "mass = 1\nmas = 3");
    text.replace(text.find("chord = 0.24"), 12, "chord = \"long\"");
    text.replace(text.find("track = 1.55\n"), 13, "");
    const auto car = read_car(text);
    REQUIRE_FALSE(car);
    std::vector<std::string> keys;
    for (const Error& error : car.errors()) keys.push_back(error.name);
    CHECK(keys == std::vector<std::string>{"car.mass", "car.mas", "rear.track", "flap.chord"});
}

TEST_CASE("the printed reference has every key with its unit, range and meaning") {
    std::ostringstream out;
    print_key_reference(out);
    for (const CarKey& key : car_keys()) {
        const std::string row = "| `" + std::string(key.key) + "` | " + std::string(key.unit) + " | " +
                                number_text(key.least) + " | " + number_text(key.most) + " | ";
        CHECK_THAT(out.str(), Contains(row) && Contains(std::string(key.meaning)));
        CHECK(key.least < key.most);
        CHECK(key.meaning.ends_with('.'));
    }
}

}  // namespace
}  // namespace holdfast::session
