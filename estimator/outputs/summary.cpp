// SPDX-License-Identifier: MIT
// summary.json. Units: seconds, metres, square metres, hertz; a value that is not known is null, never 0.
#include <cmath>
#include <nlohmann/json.hpp>
#include <optional>

#include "estimator/outputs/folder.hpp"
#include "estimator/outputs/text.hpp"
#include "estimator/outputs/words.hpp"

namespace holdfast::outputs {
namespace {

using Json = nlohmann::ordered_json;

Json finite_or_null(double value) {
    return std::isfinite(value) ? Json(value) : Json(nullptr);
}

Json area(const WeightedMean& mean) {
    const std::optional<core::Quantity> q = mean.mean();
    return {{"value", q ? Json(q->value) : Json(nullptr)},
            {"sd", q ? Json(q->sd) : Json(nullptr)},
            {"estimates", mean.count()}};
}

Json areas(const AreaMeans& means) {
    return {{"cla_front", area(means.cla_front_m2)},
            {"cla_rear", area(means.cla_rear_m2)},
            {"cda", area(means.cda_m2)}};
}

Json channel(Channel c, const core::ChannelHealth& h) {
    Json j;
    j["unit"] = info(c).si_unit;
    j["samples"] = h.samples;
    j["rate"] = h.interval_s > 0.0 ? finite_or_null(1.0 / h.interval_s) : Json(nullptr);
    j["gaps"] = h.gaps;
    j["repeats"] = h.repeats;
    j["rejected"] = {{"not_finite", h.not_finite}, {"out_of_range", h.out_of_range}, {"gated", h.gated}};
    j["health"] = word(h.trust);
    if (h.trust == core::Trust::absent) return j;
    j["since"] = seconds(h.since_ns);
    j["fault"] = h.fault == core::Fault::none ? Json(nullptr) : Json(word(h.fault));
    if (h.trust == core::Trust::distrusted) j["last_value"] = finite_or_null(h.last_value);
    return j;
}

Json channels(const core::HealthTable& health, const StreamInfo& stream) {
    Json j = Json::object();
    for (std::size_t i = 0; i < kChannelCount; ++i) {
        const auto c = static_cast<Channel>(i);
        const bool announced = ((stream.channels >> i) & 1U) != 0;
        if (announced || health[i].samples > 0)
            j[channel_name(c, stream.ride_height_names)] = channel(c, health[i]);
    }
    return j;
}

Json closures(const Tally& tally) {
    const ClosureCounts n = tally.counts();
    return {{"total", tally.closures.size()}, {"full", n.full}, {"short", n.short_of}, {"unclear", n.unclear},
            {"no_braking", n.no_braking},     {"slow", n.slow}};
}

Json alarms(const std::map<core::AlarmKind, std::uint64_t>& counts) {
    Json j = Json::object();
    for (const auto& [kind, count] : counts) j[std::string(word(kind))] = count;
    return j;
}

Json quantity(const core::Quantity& q) {
    return {{"value", finite_or_null(q.value)}, {"sd", finite_or_null(q.sd)}};
}

Json quantity(const std::optional<core::Quantity>& q) {
    return q ? quantity(*q) : Json(nullptr);
}

Json axle(const core::LearnedAxle& a) {
    return {{"rate", quantity(a.rate_npm)},      {"load_offset", quantity(a.load_offset_n)},
            {"transfer", quantity(a.transfer)},  {"area", quantity(a.area_m2)},
            {"area_slope", quantity(a.slope_m)}, {"flap_area", quantity(a.flap_m2)}};
}

Json learned(const core::Learned& l) {
    return {{"front", axle(l.front)},
            {"rear", axle(l.rear)},
            {"slip_drive", quantity(l.slip_drive)},
            {"slip_brake", quantity(l.slip_brake)},
            {"accel_x_offset", quantity(l.accel_offset_mps2)},
            {"accel_x_gain", quantity(l.accel_gain)},
            {"drive_force_gain", quantity(l.drive_gain)},
            {"pitot_scale", quantity(l.pitot_scale)}};
}

}  // namespace

std::string summary_json(const Outing& outing, const Tally& tally, const RunEnd& end,
                         const LinkCounters& link) {
    Json j;
    j["version"] = HOLDFAST_VERSION;
    j["log"] = outing.log;
    j["car"] = {{"name", outing.car_name}, {"file", outing.car_file}};
    j["complete"] = end.complete;
    j["incomplete_reason"] = end.complete ? Json(nullptr) : Json(end.reason);
    j["duration"] = end.duration_s;
    j["frames"] = {{"used", end.frames}, {"repeated", end.repeated}, {"out_of_order", end.out_of_order}};
    j["estimates_rate"] = outing.rate_hz;
    const bool known = tally.estimates > 0;
    j["reference"] = known ? Json(tally.refers_to_ground() ? "ground" : "air") : Json(nullptr);
    j["air_density"] =
        known ? Json(tally.in_standard_air() ? "standard atmosphere" : "measured") : Json(nullptr);
    j["areas"] = {{"flap_closed", areas(tally.areas.closed())}, {"flap_open", areas(tally.areas.open())}};
    j["learned"] = end.learned ? learned(*end.learned) : Json(nullptr);
    j["closures"] = closures(tally);
    j["alarms"] = alarms(tally.alarms);
    j["channels"] = channels(tally.health, outing.stream);
    if (!link.empty()) {
        for (const auto& [name, count] : link) j["link"][name] = count;
    }
    return j.dump(2) + "\n";
}

}  // namespace holdfast::outputs
