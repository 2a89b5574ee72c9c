// SPDX-License-Identifier: MIT
#include "estimator/outputs/tables.hpp"

#include "estimator/outputs/text.hpp"
#include "estimator/outputs/words.hpp"

namespace holdfast::outputs {

std::vector<Cell> closure_cells(const core::Closure& c, double chord_m) {
    const bool known = c.reattachment_known;
    const bool whole = known && c.whole;    // comes back whole: 95 % has an instant
    const bool judged = known && c.braked;  // there are brakes to judge it at
    const auto cell = [](std::string_view name, double value, bool is_known = true) {
        return Cell{name, is_known ? number(value) : std::string{}};
    };
    return {
        {"closure", std::to_string(c.number)},
        {"lap", std::to_string(c.lap)},
        {"zone", std::to_string(c.zone)},
        cell("time_command", c.time_command_s),
        cell("time_closed", c.time_closed_s),
        cell("speed", c.speed_mps),
        cell("closing_time", c.closing_time_s),
        cell("tau", c.tau_s.value, known),
        cell("tau_sd", c.tau_s.sd, known),
        cell("t95", c.t95_s, whole),
        cell("t95_low", c.t95_low_s, known),
        cell("t95_high", c.t95_high_s, whole),
        cell("plateau", c.plateau, known),
        cell("chords", c.t95_s * c.speed_mps / chord_m, whole),
        cell("time_brake", c.time_brake_s, c.braked),
        cell("margin", c.margin_s.value, whole && c.braked),
        cell("margin_sd", c.margin_s.sd, whole && c.braked),
        cell("shortfall", c.shortfall_n.value, judged),
        cell("shortfall_sd", c.shortfall_n.sd, judged),
        cell("shortfall_share", c.shortfall_share, judged),
        cell("probability_short", c.probability_short, judged),
        cell("probability_slow", c.probability_slow, known),
        {"slow", known ? (c.slow ? "1" : "0") : ""},
        {"verdict", std::string(verdict_cell(c)), Cell::Kind::word},
    };
}

std::string closures_header() {
    Row row;
    for (const Cell& cell : closure_cells({}, 1.0)) row.add(cell.name);
    return row.line();
}

std::string closure_row(const core::Closure& closure, double chord_m) {
    Row row;
    for (const Cell& cell : closure_cells(closure, chord_m)) row.add(cell.text);
    return row.line();
}

std::string_view estimates_header() {
    return "t,speed,air_density,cla_front,cla_front_sd,cla_rear,cla_rear_sd,cda,cda_sd,attached,"
           "downforce_front,downforce_rear,drag,flags\n";
}

std::string estimate_row(const core::Estimate& e) {
    Row row;
    row.add(seconds(e.time_ns)).add(e.speed_mps).add(e.air_density_kgpm3);
    row.add(e.cla_front_m2.value).add(e.cla_front_m2.sd);
    row.add(e.cla_rear_m2.value).add(e.cla_rear_m2.sd);
    row.add(e.cda_m2.value).add(e.cda_m2.sd);
    row.add(e.attached.value);
    row.add(e.downforce_front_n.value).add(e.downforce_rear_n.value).add(e.drag_n.value);
    row.add(flag_words(e.flags));
    return row.line();
}

}  // namespace holdfast::outputs
