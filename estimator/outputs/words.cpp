// SPDX-License-Identifier: MIT
#include "estimator/outputs/words.hpp"

#include <array>
#include <utility>

namespace holdfast::outputs {
namespace {

constexpr std::array<std::pair<core::EstimateFlag, std::string_view>, 9> kFlagWords{{
    {core::kNotConverged, "not_converged"},
    {core::kStale, "stale"},
    {core::kGroundReference, "ground_reference"},
    {core::kStandardAir, "standard_air"},
    {core::kDragByCoasting, "drag_by_coasting"},
    {core::kSlow, "slow"},
    {core::kFlapOpen, "flap_open"},
    {core::kReattaching, "reattaching"},
    {core::kSensorDistrusted, "sensor_distrusted"},
}};

}  // namespace

std::string flag_words(std::uint32_t flags) {
    std::string words;
    for (const auto& [bit, name] : kFlagWords) {
        if ((flags & bit) == 0) continue;
        if (!words.empty()) words += '|';
        words += name;
    }
    return words;
}

std::string_view word(core::Verdict verdict) {
    switch (verdict) {
        case core::Verdict::full:
            return "full";
        case core::Verdict::short_of:
            return "short";
        case core::Verdict::unclear:
            break;
    }
    return "unclear";
}

std::string_view word(core::AlarmKind kind) {
    switch (kind) {
        case core::AlarmKind::short_at_brakes:
            return "short_at_brakes";
        case core::AlarmKind::unknown_at_brakes:
            return "unknown_at_brakes";
        case core::AlarmKind::slow_reattachment:
            return "slow_reattachment";
        case core::AlarmKind::data_stale:
            return "data_stale";
        case core::AlarmKind::sensor_distrusted:
            return "sensor_distrusted";
    }
    return "unknown";
}

std::string_view word(core::Trust trust) {
    switch (trust) {
        case core::Trust::absent:
            return "absent";
        case core::Trust::good:
            return "good";
        case core::Trust::distrusted:
            return "distrusted";
    }
    return "unknown";
}

std::string_view word(core::Fault fault) {
    switch (fault) {
        case core::Fault::none:
            return "none";
        case core::Fault::gone:
            return "gone";
        case core::Fault::stuck:
            return "stuck";
        case core::Fault::jumped:
            return "jumped";
        case core::Fault::drifting:
            return "drifting";
        case core::Fault::noisy:
            return "noisy";
        case core::Fault::disagrees:
            return "disagrees";
    }
    return "unknown";
}

std::string_view verdict_cell(const core::Closure& closure) {
    return closure.braked ? word(closure.verdict) : std::string_view{};
}

}  // namespace holdfast::outputs
