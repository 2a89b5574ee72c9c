// SPDX-License-Identifier: MIT
#include "estimator/outputs/zones.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <map>

#include "estimator/outputs/text.hpp"

namespace holdfast::outputs {
namespace {

// Median of the finite values; NaN where there is none.
double median(std::vector<double> values) {
    std::erase_if(values, [](double v) { return !std::isfinite(v); });
    if (values.empty()) return std::numeric_limits<double>::quiet_NaN();
    std::sort(values.begin(), values.end());
    const std::size_t half = values.size() / 2;
    return values.size() % 2 == 1 ? values[half] : 0.5 * (values[half - 1] + values[half]);
}

Zone zone(std::int32_t number, const std::vector<const core::Closure*>& closures) {
    Zone z{.number = number};
    std::vector<double> distances;
    std::vector<double> leads;
    std::vector<double> margins;
    for (const core::Closure* c : closures) {
        ++z.closures;
        if (c->verdict == core::Verdict::short_of) ++z.short_of;
        if (c->slow) ++z.slow;
        distances.push_back(c->lap_distance_brake_m);
        leads.push_back(c->time_brake_s - c->time_command_s);
        if (c->reattachment_known && c->whole) margins.push_back(c->margin_s.value);
    }
    z.distance_brake_m = median(distances);
    z.lead_now_s = median(leads);
    z.margin_median_s = median(margins);
    return z;
}

}  // namespace

std::vector<Zone> zones(std::span<const core::Closure> closures) {
    std::map<std::int32_t, std::vector<const core::Closure*>> by_number;
    for (const core::Closure& c : closures)
        if (c.braked && c.zone > 0) by_number[c.zone].push_back(&c);
    std::vector<Zone> table;
    table.reserve(by_number.size());
    for (const auto& [number, members] : by_number) table.push_back(zone(number, members));
    return table;
}

std::string zones_csv(std::span<const Zone> zones) {
    std::string text =
        "zone,distance_brake,closures,short,slow,lead_now,margin_median,lead_advised,"
        "lead_advised_distance,risk,lap_time_cost\n";
    for (const Zone& z : zones) {
        Row row;
        row.add(z.number).add(z.distance_brake_m).add(z.closures).add(z.short_of).add(z.slow);
        row.add(z.lead_now_s).add(z.margin_median_s);
        row.empty().empty().empty().empty();
        text += row.line();
    }
    return text;
}

}  // namespace holdfast::outputs
