// SPDX-License-Identifier: MIT
#include "estimator/outputs/tables.hpp"

#include "estimator/outputs/text.hpp"
#include "estimator/outputs/words.hpp"

namespace holdfast::outputs {

std::string_view closures_header() {
    return "closure,lap,zone,time_command,time_closed,speed,closing_time,tau,tau_sd,t95,t95_low,t95_high,"
           "plateau,chords,time_brake,margin,margin_sd,shortfall,shortfall_sd,shortfall_share,"
           "probability_short,probability_slow,slow,verdict\n";
}

std::string closure_row(const core::Closure& c, double chord_m) {
    const bool known = c.reattachment_known;
    const bool whole = known && c.whole;    // comes back whole: 95 % has an instant
    const bool judged = known && c.braked;  // there are brakes to judge it at
    Row row;
    row.add(c.number).add(c.lap).add(c.zone);
    row.add(c.time_command_s).add(c.time_closed_s).add(c.speed_mps).add(c.closing_time_s);
    row.add_if(known, c.tau_s.value).add_if(known, c.tau_s.sd);
    row.add_if(whole, c.t95_s).add_if(known, c.t95_low_s).add_if(whole, c.t95_high_s);
    row.add_if(known, c.plateau).add_if(whole, c.t95_s * c.speed_mps / chord_m);
    row.add_if(c.braked, c.time_brake_s);
    row.add_if(whole && c.braked, c.margin_s.value).add_if(whole && c.braked, c.margin_s.sd);
    row.add_if(judged, c.shortfall_n.value).add_if(judged, c.shortfall_n.sd);
    row.add_if(judged, c.shortfall_share).add_if(judged, c.probability_short);
    row.add_if(known && c.usual_known, c.probability_slow);
    if (known) {
        row.add(c.slow ? 1 : 0);
    } else {
        row.empty();
    }
    row.add(verdict_cell(c));
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
