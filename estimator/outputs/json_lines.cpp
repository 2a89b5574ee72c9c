// SPDX-License-Identifier: MIT
#include "estimator/outputs/json_lines.hpp"

#include <cmath>
#include <nlohmann/json.hpp>
#include <ostream>

#include "estimator/outputs/tables.hpp"
#include "estimator/outputs/text.hpp"
#include "estimator/outputs/words.hpp"

namespace holdfast::outputs {
namespace {

using Json = nlohmann::ordered_json;

Json json(const Cell& cell) {
    if (cell.text.empty()) return nullptr;
    return cell.kind == Cell::Kind::word ? Json(cell.text) : Json::parse(cell.text);
}

Json finite_or_null(double value) {
    return std::isfinite(value) ? Json(value) : Json(nullptr);
}

}  // namespace

std::string closure_json(const core::Closure& closure, double chord_m) {
    Json cells;
    for (const Cell& cell : closure_cells(closure, chord_m)) cells[std::string(cell.name)] = json(cell);
    return Json{{"closure", cells}}.dump();
}

std::string alarm_json(const core::Alarm& alarm, const StreamInfo& stream) {
    Json j{{"kind", word(alarm.kind)}, {"time", seconds(alarm.time_ns)}};
    if (alarm.closure != 0) j["closure"] = alarm.closure;
    switch (alarm.kind) {
        case core::AlarmKind::short_at_brakes:
            j["shortfall"] = finite_or_null(alarm.shortfall_n.value);
            j["shortfall_sd"] = finite_or_null(alarm.shortfall_n.sd);
            [[fallthrough]];
        case core::AlarmKind::slow_reattachment:
            j["probability"] = finite_or_null(alarm.probability);
            break;
        case core::AlarmKind::data_stale:
        case core::AlarmKind::sensor_distrusted:
            j["channel"] = channel_name(alarm.channel, stream.ride_height_names);
            break;
        case core::AlarmKind::unknown_at_brakes:
            j["probability"] = nullptr;
            break;
    }
    return Json{{"alarm", j}}.dump();
}

void JsonLines::on_closure(const core::Closure& closure) {
    out_ << closure_json(closure, folder_.outing().flap_chord_m) << std::endl;
}

void JsonLines::on_alarm(const core::Alarm& alarm) {
    out_ << alarm_json(alarm, folder_.outing().stream) << std::endl;
}

void JsonLines::on_end(const RunEnd&) {
    out_ << Json{{"summary", Json::parse(folder_.summary())}}.dump() << std::endl;
}

}  // namespace holdfast::outputs
