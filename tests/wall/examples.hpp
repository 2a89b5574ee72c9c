// SPDX-License-Identifier: MIT
// Hand-made items for the tests of the wall.
#pragma once

#include <array>
#include <memory>
#include <string>
#include <vector>

#include "estimator/wall/item.hpp"
#include "estimator/wall/page_file.hpp"
#include "tests/outputs/examples.hpp"

namespace holdfast::examples {

inline constexpr std::array<wall::PageFile, 3> kFiles{{
    {"index.html", "text/html; charset=utf-8", "<!doctype html><title>wall</title>"},
    {"main.js", "text/javascript; charset=utf-8", "export {};\n"},
    {"style.css", "text/css; charset=utf-8", "body {}\n"},
}};

inline std::shared_ptr<const wall::Hello> hello(std::uint32_t stream = 1, std::string car = "Plover 11") {
    wall::Hello h;
    h.car_name = std::move(car);
    h.origin = "outing.hfr";
    h.stream = stream;
    h.flap_chord_m = 0.2;
    h.channels.channels = std::uint64_t{1} << index(Channel::speed);
    return std::make_shared<const wall::Hello>(std::move(h));
}

// The i-th row at 50 Hz; every fifth is one of the 10 Hz.
inline wall::Row row(std::size_t i) {
    wall::Row r;
    r.time_ns = static_cast<std::int64_t>(i) * 20'000'000;
    r.history = i % 5 == 0;
    r.value.fill(1.0);
    return r;
}

inline std::vector<wall::Item> rows(std::size_t from, std::size_t to) {
    std::vector<wall::Item> items;
    for (std::size_t i = from; i < to; ++i) items.emplace_back(row(i));
    return items;
}

inline core::Closure closure(std::uint32_t number) {
    core::Closure c = known_closure();
    c.number = number;
    return c;
}

inline std::shared_ptr<const wall::ZonedRegrowth> regrowth(std::uint32_t number, bool final) {
    wall::ZonedRegrowth r;
    r.curve.closure = number;
    r.curve.final = final;
    r.zone = 3;
    return std::make_shared<const wall::ZonedRegrowth>(r);
}

inline wall::AlarmRail::Change raised(std::uint32_t id) {
    wall::AlarmRail::Change change;
    change.alarm.id = change.alarm.burst = id;
    change.alarm.alarm = alarm(core::AlarmKind::short_at_brakes, id);
    return change;
}

inline std::shared_ptr<const wall::Health> health(std::int64_t time_ns) {
    wall::Health h{};
    h.time_ns = time_ns;
    return std::make_shared<const wall::Health>(h);
}

}  // namespace holdfast::examples
