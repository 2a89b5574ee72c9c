// SPDX-License-Identifier: MIT
#include "firmware_host/car/scenario.hpp"

#include <algorithm>
#include <charconv>
#include <stdexcept>

#include "firmware_host/car/families.hpp"

namespace holdfast::sim {
namespace {

struct Family {
    std::string_view word;
    std::string_view car;  // what such a car is called
    std::string_view help;
    void (*draw)(Scenario&, Random&);
};

constexpr Family kFamilies[] = {
    {"open_wheel", "Plover", "light, stiff, 5 g brakes, large flap", draw_open_wheel},
    {"prototype", "Curlew", "1000 kg, closed wheels, smaller flap, 4 g brakes", draw_prototype},
    {"heavy_closed", "Bittern", "1350 kg, tall, little downforce, 3 g brakes, slow flap", draw_heavy_closed},
};

// What the variants that act before the sensors are drawn leave behind.
struct Wishes {
    double sensor_scale = 1.0;
    bool extra_sensors = false;
    bool bare = false;
};

struct Variant {
    std::string_view word;
    std::string_view help;
    void (*apply)(Scenario&, Wishes&);
};

constexpr Variant kVariants[] = {
    {"calm", "no wind, no gusts", [](Scenario& s, Wishes&) { s.air.wind_mps = s.air.gust_sd_mps = 0.0; }},
    {"windy", "7 m/s with gusts of 1.2 m/s",
     [](Scenario& s, Wishes&) {
         s.air.wind_mps = 7.0;
         s.air.gust_sd_mps = 1.2;
     }},
    {"smooth", "new asphalt, no kerbs",
     [](Scenario& s, Wishes&) {
         s.road.roughness_m3 = 0.5e-6;
         s.circuit.kerbs.clear();
     }},
    {"rough", "as rough as a circuit gets", [](Scenario& s, Wishes&) { s.road.roughness_m3 = 8e-6; }},
    {"noisy", "sensors two and a half times as bad", [](Scenario&, Wishes& w) { w.sensor_scale = 2.5; }},
    {"perfect", "sensors without errors but their steps", [](Scenario&, Wishes& w) { w.sensor_scale = 0.0; }},
    {"full", "with accel_z, pitot, heading and yaw rate",
     [](Scenario&, Wishes& w) { w.extra_sensors = true; }},
    {"bare", "only the channels that are needed", [](Scenario&, Wishes& w) { w.bare = true; }},
    {"tight", "brakes 30 to 100 ms after the flap is shut",
     [](Scenario& s, Wishes&) {
         s.driver.gap_least_s = 0.03;
         s.driver.gap_most_s = 0.10;
     }},
    {"healthy", "every closing as usual",
     [](Scenario& s, Wishes&) { s.driver.slow_probability = s.driver.part_probability = 0.0; }},
    {"sick", "four closings in ten slow, one in ten settles short of whole",
     [](Scenario& s, Wishes&) {
         s.driver.slow_probability = 0.4;
         s.driver.part_probability = 0.1;
     }},
    {"first", "flow comes back to first order",
     [](Scenario& s, Wishes&) { s.flap.shape = Reattachment::first_order; }},
    {"point", "flow comes back by a moving separation point",
     [](Scenario& s, Wishes&) { s.flap.shape = Reattachment::separation_point; }},
    {"tail", "flow comes back with a slow tail",
     [](Scenario& s, Wishes&) { s.flap.shape = Reattachment::slow_tail; }},
    {"peaked", "downforce peaks at a ride height that the car passes as the flap closes",
     [](Scenario& s, Wishes&) {
         s.aero.front.best_height_m = 0.20 * s.aero.floor_front_m;
         s.aero.front.width_m = 0.018;
         s.aero.rear.best_height_m = 0.46 * s.aero.floor_rear_m;
         s.aero.rear.width_m = 0.030;
     }},
    {"demo", "3 laps, 8 closings: two slow, one of these with the brakes close behind",
     [](Scenario& s, Wishes&) {
         s.laps = 3;
         s.driver.slow_probability = 0.0;
         PlannedClosing slow_in_time{.lap = 2, .zone = 3};
         slow_in_time.tau_factor = 2.4;
         slow_in_time.gap_s = 0.42;
         PlannedClosing slow_and_short{.lap = 3, .zone = 1};
         slow_and_short.tau_factor = 3.0;
         slow_and_short.gap_s = 0.10;
         s.planned = {slow_in_time, slow_and_short, {.lap = 1, .zone = 1, .keep_shut = true}};
     }},
    {"long", "20 laps", [](Scenario& s, Wishes&) { s.laps = 20; }},
};

bool needed(std::size_t channel) {
    const auto c = static_cast<Channel>(channel);
    return is_ride_height(c) || c == Channel::speed || c == Channel::flap_position ||
           (c >= Channel::load_fl && c <= Channel::load_rr);
}

void draw_surroundings(Scenario& s, Random& random) {
    s.circuit = draw_circuit(3 + (random.happens(0.3) ? 1 : 0), random.uniform(820.0, 1150.0), random);
    s.circuit.name = "Weidenring";
    s.road.roughness_m3 = 1e-6 * std::pow(10.0, random.uniform(-0.15, 0.55));
    s.road.left_right_correlation = random.uniform(0.4, 0.8);
    s.air.temperature_k = random.uniform(283.0, 308.0);
    s.air.pressure_pa = random.uniform(95e3, 102.5e3);
    s.air.relative_humidity = random.uniform(0.25, 0.85);
    s.air.wind_mps = random.uniform(0.0, 5.0);
    s.air.wind_from_rad = random.uniform(0.0, 6.283);
    s.air.gust_sd_mps = random.uniform(0.2, 0.7);
    s.air.gust_time_s = random.uniform(0.8, 3.0);
}

[[noreturn]] void unknown_word(std::string_view word, std::string_view name) {
    throw std::invalid_argument("scenario \"" + std::string(name) + "\": \"" + std::string(word) +
                                "\" is not known; expected FAMILY[-VARIANT]... of\n" + scenario_help());
}

std::vector<std::string_view> split(std::string_view text, char at) {
    std::vector<std::string_view> parts;
    for (;;) {
        const auto end = text.find(at);
        parts.push_back(text.substr(0, end));
        if (end == std::string_view::npos) return parts;
        text.remove_prefix(end + 1);
    }
}

template <class Row, std::size_t n>
const Row* find(const Row (&rows)[n], std::string_view word) {
    const auto* row =
        std::find_if(std::begin(rows), std::end(rows), [&](const Row& r) { return r.word == word; });
    return row == std::end(rows) ? nullptr : row;
}

}  // namespace

Scenario make_scenario(std::string_view name, std::uint64_t seed) {
    const auto words = split(name, '-');
    const Family* family = find(kFamilies, words.front());
    if (family == nullptr) unknown_word(words.front(), name);
    Scenario s;
    s.name = name;
    s.seed = seed;
    s.car_name = std::string(family->car) + " " + std::to_string(seed);
    Random random(seed, Stream::car);
    family->draw(s, random);
    Random around(seed, Stream::circuit);
    draw_surroundings(s, around);
    Wishes wishes;
    for (std::size_t i = 1; i < words.size(); ++i) {
        const Variant* variant = find(kVariants, words[i]);
        if (variant == nullptr) unknown_word(words[i], name);
        variant->apply(s, wishes);
    }
    s.sensors = draw_sensors(s.ride_heights.size(), wishes.sensor_scale, random);
    if (wishes.extra_sensors) fit_extra_sensors(s.sensors, wishes.sensor_scale, random);
    for (std::size_t i = 0; i < kChannelCount; ++i) {
        if (wishes.bare && !needed(i)) s.sensors[i].fitted = false;
    }
    return s;
}

std::string scenario_help() {
    std::string text;
    const auto line = [&text](std::string_view word, std::string_view help) {
        text += "  " + std::string(word) + std::string(16 - std::min<std::size_t>(15, word.size()), ' ') +
                std::string(help) + '\n';
    };
    text += "families:\n";
    for (const Family& family : kFamilies) line(family.word, family.help);
    text += "variants:\n";
    for (const Variant& variant : kVariants) line(variant.word, variant.help);
    return text;
}

}  // namespace holdfast::sim
