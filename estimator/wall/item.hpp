// SPDX-License-Identifier: MIT
// What a run tells the wall: plain, immutable facts, made by the thread that estimates and read by the one
// that serves. Times are source time; SI units; NaN where a value is not known.
#pragma once

#include <array>
#include <cstdint>
#include <memory>
#include <string>
#include <string_view>
#include <variant>
#include <vector>

#include "estimator/core/car.hpp"
#include "estimator/core/regrowth.hpp"
#include "estimator/core/results.hpp"
#include "estimator/core/settings.hpp"
#include "estimator/wall/alarm_rail.hpp"
#include "estimator/wall/conditions.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::wall {

// A stream begins: everything told before belongs to another outing.
struct Hello {
    std::string car_name;
    std::string origin;  // file or endpoint
    bool live = false;
    bool smoothed = false;     // the files and the report use the whole outing; the page never does
    std::uint32_t stream = 1;  // counts the restarts of the node
    double flap_chord_m = 0.0;
    core::Quantity mass_kg;  // of the car file, at the start of the outing
    core::Quantity fuel_per_lap_kg;
    core::Settings settings;
    std::vector<std::string> cautions;
    StreamInfo channels;
};

// One instant of the traces. The columns after the time, in the order of kColumns.
inline constexpr std::array<std::string_view, 17> kColumns{"speed",
                                                           "flap",
                                                           "load_front",
                                                           "load_rear",
                                                           "cla_front",
                                                           "cla_front_sd",
                                                           "cla_rear",
                                                           "cla_rear_sd",
                                                           "cda",
                                                           "cda_sd",
                                                           "attached",
                                                           "downforce_front",
                                                           "downforce_front_sd",
                                                           "downforce_rear",
                                                           "downforce_rear_sd",
                                                           "drag",
                                                           "drag_sd"};

// Its place in Row::value.
[[nodiscard]] consteval std::size_t column(std::string_view name) {
    for (std::size_t i = 0; i < kColumns.size(); ++i)
        if (kColumns[i] == name) return i;
    throw "no such column";  // at compile time
}

struct Row {
    std::int64_t time_ns = 0;
    bool history = false;  // of the 10 Hz that are kept for those who come late
    std::uint32_t flags = 0;
    double lap = 0.0;
    double lap_distance_m = 0.0;
    std::array<double, kColumns.size()> value{};
};

struct ZonedRegrowth {
    core::Regrowth curve;
    std::int32_t zone = 0;  // 0: not known yet, or none
};

struct Health {
    std::int64_t time_ns = 0;
    core::HealthTable table;
};

struct LinkStatus {
    enum class State : std::uint8_t { up, silent, ended };
    State state = State::up;
    std::uint64_t messages = 0;
    std::uint64_t lost = 0;
    std::uint64_t repeated = 0;
    std::uint64_t out_of_order = 0;
    std::uint64_t damaged = 0;
    std::uint64_t restarts = 0;
};

struct End {
    bool complete = true;
    std::string summary;  // the text of summary.json
    Conditions conditions{};
};

using Item =
    std::variant<std::shared_ptr<const Hello>, Row, core::Closure, std::shared_ptr<const ZonedRegrowth>,
                 AlarmRail::Change, std::shared_ptr<const Health>, LinkStatus, std::shared_ptr<const End>>;

}  // namespace holdfast::wall
