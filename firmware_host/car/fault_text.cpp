// SPDX-License-Identifier: MIT
// Reads a fault from its text form.
#include <charconv>
#include <stdexcept>
#include <vector>

#include "firmware_host/car/scenario.hpp"

namespace holdfast::sim {
namespace {

struct Kind {
    std::string_view word;
    FaultKind kind;
    bool needs_magnitude;
};

constexpr Kind kKinds[] = {
    {"stuck", FaultKind::stuck, false},  {"drift", FaultKind::drift, true},
    {"spikes", FaultKind::spikes, true}, {"step", FaultKind::step, true},
    {"noise", FaultKind::noise, true},   {"gone", FaultKind::gone, false},
    {"gaps", FaultKind::gaps, true},     {"invalid", FaultKind::invalid, false},
};

constexpr std::string_view kForm = "CHANNEL:KIND:FROM_S[:MAGNITUDE[:UNTIL_S]]";

[[noreturn]] void refuse(std::string_view text, const std::string& why) {
    throw std::invalid_argument("fault \"" + std::string(text) + "\": " + why + "; expected " +
                                std::string(kForm));
}

Channel channel_of(std::string_view name, std::string_view text, const Scenario& scenario) {
    constexpr std::string_view kRideHeight = "ride_height_";
    if (name.substr(0, kRideHeight.size()) == kRideHeight) {
        for (std::size_t i = 0; i < scenario.ride_heights.size(); ++i) {
            if (scenario.ride_heights[i].name == name.substr(kRideHeight.size()))
                return ride_height_channel(i);
        }
    }
    for (std::size_t i = 0; i < kChannelInfo.size(); ++i) {
        if (kChannelInfo[i].name == name) return static_cast<Channel>(i);
    }
    refuse(text, "this car has no channel \"" + std::string(name) + "\"");
}

double number(std::string_view part, std::string_view text, const char* what) {
    double value = 0.0;
    const auto [end, error] = std::from_chars(part.data(), part.data() + part.size(), value);
    if (error != std::errc{} || end != part.data() + part.size()) {
        refuse(text, std::string(what) + " \"" + std::string(part) + "\" is not a number");
    }
    return value;
}

}  // namespace

Fault parse_fault(std::string_view text, const Scenario& scenario) {
    std::vector<std::string_view> parts;
    for (std::string_view rest = text;;) {
        const auto end = rest.find(':');
        parts.push_back(rest.substr(0, end));
        if (end == std::string_view::npos) break;
        rest.remove_prefix(end + 1);
    }
    if (parts.size() < 3 || parts.size() > 5) {
        refuse(text, std::to_string(parts.size()) + " parts instead of 3 to 5");
    }
    Fault fault;
    fault.channel = channel_of(parts[0], text, scenario);
    if (!scenario.sensors[index(fault.channel)].fitted) {
        refuse(text, "this car has no channel \"" + std::string(parts[0]) + "\"");
    }
    const Kind* kind = nullptr;
    std::string known;
    for (const Kind& k : kKinds) {
        if (k.word == parts[1]) kind = &k;
        known += (known.empty() ? "" : ", ") + std::string(k.word);
    }
    if (kind == nullptr) refuse(text, "\"" + std::string(parts[1]) + "\" is none of " + known);
    fault.kind = kind->kind;
    fault.from_s = number(parts[2], text, "FROM_S");
    if (kind->needs_magnitude && parts.size() < 4)
        refuse(text, std::string(kind->word) + " needs a magnitude");
    if (parts.size() > 3) fault.magnitude = number(parts[3], text, "MAGNITUDE");
    if (parts.size() > 4) fault.until_s = number(parts[4], text, "UNTIL_S");
    return fault;
}

}  // namespace holdfast::sim
