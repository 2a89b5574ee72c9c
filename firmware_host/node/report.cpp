// SPDX-License-Identifier: MIT
#include "firmware_host/node/report.hpp"

#include <cstdio>
#include <iostream>

namespace holdfast::node {

void tell_error(const std::string& message) {
    std::cerr << "error: " << message << '\n';
}
void tell_note(const std::string& message) {
    std::cerr << message << '\n';
}

std::string when_it_begins(std::size_t subscribers) {
    if (subscribers == 0) return {};
    return " once " + std::to_string(subscribers) + (subscribers == 1 ? " has" : " have") + " subscribed";
}

std::string sending_report(const Uplink& uplink, const Pacer& pacer) {
    std::string report = "sent " + std::to_string(uplink.rows()) + " frames in " +
                         std::to_string(uplink.messages()) + " messages";
    if (pacer.pace() > 0) {
        char worst_ms[32];
        std::snprintf(worst_ms, sizeof worst_ms, "%.1f",
                      static_cast<double>(pacer.worst_lateness_ns()) * 1e-6);
        report += "; the latest was " + std::string(worst_ms) + " ms late, " + std::to_string(pacer.slips()) +
                  " were more than " + std::to_string(Pacer::kSlip_ns / 1'000'000) + " ms late";
    }
    if (uplink.overflows() > 0)
        report += "; a subscriber's queue was full " + std::to_string(uplink.overflows()) + " times";
    return report;
}

}  // namespace holdfast::node
