// SPDX-License-Identifier: MIT
#include "estimator/wall/messages.hpp"

#include <charconv>
#include <cmath>
#include <limits>
#include <nlohmann/json.hpp>

#include "estimator/outputs/terminal.hpp"
#include "estimator/outputs/text.hpp"
#include "estimator/outputs/words.hpp"

namespace holdfast::wall {
namespace {

using Json = nlohmann::ordered_json;
using outputs::seconds;
using outputs::word;

// Six significant digits are finer than any screen.
void append(std::string& text, double value) {
    if (!std::isfinite(value)) {
        text += "null";
        return;
    }
    char digits[32];
    const auto end = std::to_chars(digits, digits + sizeof digits, value, std::chars_format::general, 6);
    text.append(digits, end.ptr);
}

// Times keep tenths of a millisecond, however long the outing.
void append_time(std::string& text, std::int64_t time_ns) {
    char digits[32];
    const auto end =
        std::to_chars(digits, digits + sizeof digits, seconds(time_ns), std::chars_format::fixed, 4);
    text.append(digits, end.ptr);
}

Json number(double value) {
    if (!std::isfinite(value)) return nullptr;
    std::string text;
    append(text, value);
    return Json::parse(text);
}
Json time_number(double time_s) {
    return std::isfinite(time_s) ? Json(std::round(time_s * 1e4) / 1e4) : Json(nullptr);
}
Json number_if(bool known, double value) {
    return known ? number(value) : Json(nullptr);
}
Json quantity_if(bool known, const core::Quantity& q) {
    return known ? Json{number(q.value), number(q.sd)} : Json(nullptr);
}
template <class Range>
Json numbers(const Range& range) {
    Json list = Json::array();
    for (const double value : range) list.push_back(number(value));
    return list;
}

// Names come from files: what is not UTF-8 in them is replaced, never thrown at.
std::string dump(const Json& json) {
    return json.dump(-1, ' ', false, Json::error_handler_t::replace);
}

template <class Append>
void append_column(std::string& text, std::string_view name, const Now& now, Append append_one) {
    text += '"';
    text += name;
    text += "\":[";
    const std::size_t start = text.size();
    for (const auto rows : {now.thinned, now.rows}) {
        for (const Row& row : rows) {
            if (text.size() > start) text += ',';
            append_one(row);
        }
    }
    text += ']';
}

void append_columns(std::string& text, const Now& now) {
    text += '{';
    append_column(text, "t", now, [&](const Row& row) { append_time(text, row.time_ns); });
    for (std::size_t c = 0; c < kColumns.size(); ++c) {
        text += ',';
        append_column(text, kColumns[c], now, [&](const Row& row) { append(text, row.value[c]); });
    }
    text += '}';
}

Json flag_list(std::uint32_t flags) {
    Json list = Json::array();
    const std::string words = outputs::flag_words(flags);
    for (std::size_t from = 0; from < words.size();) {
        const std::size_t to = std::min(words.find('|', from), words.size());
        list.push_back(words.substr(from, to - from));
        from = to + 1;
    }
    return list;
}

std::string_view word(LinkStatus::State state) {
    switch (state) {
        case LinkStatus::State::up:
            return "up";
        case LinkStatus::State::silent:
            return "silent";
        case LinkStatus::State::ended:
            break;
    }
    return "ended";
}

std::string_view word(Severity severity) {
    switch (severity) {
        case Severity::high:
            return "high";
        case Severity::medium:
            return "medium";
        case Severity::low:
            break;
    }
    return "low";
}

Json json(const LinkStatus& link) {
    return {{"state", word(link.state)}, {"messages", link.messages},         {"lost", link.lost},
            {"repeated", link.repeated}, {"out_of_order", link.out_of_order}, {"damaged", link.damaged},
            {"restarts", link.restarts}};
}

Json json(const Range& range) {
    return range.known() ? Json{number(range.least), number(range.most)} : Json(nullptr);
}

Json json(const Conditions& c) {
    const auto headwind = c.headwind_mps();
    return {{"air_temperature", json(c.air_temperature_k)},
            {"air_pressure", json(c.air_pressure_pa)},
            {"relative_humidity", json(c.relative_humidity)},
            {"air_density", json(c.air_density_kgpm3)},
            {"headwind", headwind ? quantity_if(true, *headwind) : Json(nullptr)},
            {"lap", json(c.lap)}};
}

Json channel_list(const StreamInfo& stream) {
    Json list = Json::array();
    for (std::size_t i = 0; i < kChannelCount; ++i) {
        if (((stream.channels >> i) & 1U) == 0) continue;
        const auto c = static_cast<Channel>(i);
        list.push_back({{"name", channel_name(c, stream.ride_height_names)}, {"unit", info(c).si_unit}});
    }
    return list;
}

Json json(Channel c, const core::ChannelHealth& h, std::int64_t now_ns, const StreamInfo& stream) {
    const bool tried = h.status.innovation_variance > 0.0;
    const bool seen = h.samples > 0;
    return {{"name", channel_name(c, stream.ride_height_names)},
            {"unit", info(c).si_unit},
            {"trust", word(h.trust)},
            {"fault", word(h.fault)},
            {"since", time_number(seconds(h.since_ns))},
            {"rate_hz", number_if(h.interval_s > 0.0, 1.0 / h.interval_s)},
            {"samples", h.samples},
            {"gaps", h.gaps},
            {"repeats", h.repeats},
            {"not_finite", h.not_finite},
            {"out_of_range", h.out_of_range},
            {"gated", h.gated},
            {"value", number_if(seen, h.last_value)},
            {"innovation", number_if(tried, h.status.innovation)},
            {"innovation_sd", number_if(tried, std::sqrt(h.status.innovation_variance))},
            {"test_ratio", number_if(tried, h.status.test_ratio)},
            {"age_s", number_if(seen, seconds(now_ns - h.last_time_ns))}};
}

}  // namespace

std::string hello_json(const Hello& hello) {
    const bool air = ((hello.channels.channels >> index(Channel::pitot_pressure)) & 1U) != 0;
    return dump({{"kind", "hello"},
                 {"version", HOLDFAST_VERSION},
                 {"car", hello.car_name},
                 {"origin", hello.origin},
                 {"live", hello.live},
                 {"smoothed", hello.smoothed},
                 {"stream", hello.stream},
                 {"reference", air ? "air" : "ground"},
                 {"mass", quantity_if(hello.mass_kg.value > 0.0, hello.mass_kg)},
                 {"fuel_per_lap", quantity_if(hello.mass_kg.value > 0.0, hello.fuel_per_lap_kg)},
                 {"limits",
                  {{"short_share", hello.settings.short_share_limit},
                   {"alarm_probability", hello.settings.alarm_probability},
                   {"slow_factor", hello.settings.slow_factor}}},
                 {"cautions", hello.cautions},
                 {"channels", channel_list(hello.channels)}});
}

std::string history_json(std::span<const Row> rows, double step_s) {
    std::string text = R"({"kind":"history","step_s":)";
    append(text, step_s);
    text += R"(,"columns":)";
    append_columns(text, {.thinned = {}, .rows = rows, .newest = {}, .link = {}});
    return text + "}";
}

std::string now_json(const Now& now) {
    Json j{{"kind", "now"},
           {"t", now.any ? time_number(seconds(now.newest.time_ns)) : Json(nullptr)},
           {"flags", flag_list(now.newest.flags)},
           {"lap", number_if(now.any, now.newest.lap)},
           {"lap_distance", number_if(now.any, now.newest.lap_distance_m)},
           {"age_s", number(now.age_s)},
           {"link", json(now.link)}};
    if (!now.thinned.empty()) j["thinned"] = true;
    std::string text = dump(j);
    text.back() = ',';
    text += R"("samples":)";
    append_columns(text, now);
    return text + "}";
}

std::string closure_object(const core::Closure& c, double chord_m) {
    const bool known = c.reattachment_known;
    const bool whole = known && c.whole;
    const bool judged = known && c.braked;
    const std::string_view verdict = outputs::verdict_cell(c);
    return dump({{"number", c.number},
                 {"lap", c.lap},
                 {"zone", c.zone},
                 {"time_command", time_number(c.time_command_s)},
                 {"time_closed", time_number(c.time_closed_s)},
                 {"speed", number(c.speed_mps)},
                 {"closing_time", number(c.closing_time_s)},
                 {"tau", quantity_if(known, c.tau_s)},
                 {"t95", number_if(whole, c.t95_s)},
                 {"t95_low", number_if(known, c.t95_low_s)},
                 {"t95_high", number_if(whole, c.t95_high_s)},
                 {"plateau", number_if(known, c.plateau)},
                 {"chords", number_if(whole, c.t95_s * c.speed_mps / chord_m)},
                 {"whole", c.whole},
                 {"time_brake", c.braked ? time_number(c.time_brake_s) : Json(nullptr)},
                 {"lap_distance_brake", number_if(c.braked, c.lap_distance_brake_m)},
                 {"margin", quantity_if(whole && c.braked, c.margin_s)},
                 {"shortfall", quantity_if(judged, c.shortfall_n)},
                 {"shortfall_share", number_if(judged, c.shortfall_share)},
                 {"probability_short", number_if(judged, c.probability_short)},
                 {"probability_slow", number_if(known, c.probability_slow)},
                 {"slow", known && c.slow},
                 {"verdict", verdict.empty() ? Json(nullptr) : Json(verdict)},
                 {"usual_known", c.usual_known}});
}

std::string regrowth_object(const ZonedRegrowth& regrowth) {
    const core::Regrowth& r = regrowth.curve;
    Json times = Json::array();
    for (std::size_t i = 0; i < core::Regrowth::kPoints; ++i)
        times.push_back(number(core::Regrowth::time_s(i)));
    const std::span flap_time(r.flap_time_s.data(), r.flap_count);
    const std::span flap_position(r.flap_position.data(), r.flap_count);
    return dump({{"closure", r.closure},
                 {"zone", regrowth.zone},
                 {"final", r.final},
                 {"shut", r.shut},
                 {"time_shut", time_number(r.time_shut_s)},
                 {"time_command", time_number(r.time_command_s)},
                 {"chord_time", number(r.chord_time_s)},
                 {"known_until", number(r.known_until_s)},
                 {"t", std::move(times)},
                 {"share", numbers(r.share)},
                 {"low", numbers(r.low)},
                 {"high", numbers(r.high)},
                 {"flap", {{"t", numbers(flap_time)}, {"position", numbers(flap_position)}}}});
}

std::string alarm_object(const RailAlarm& a, const StreamInfo& stream) {
    const bool of_channel = a.alarm.kind == core::AlarmKind::sensor_distrusted;
    return dump({{"id", a.id},
                 {"condition", word(a.alarm.kind)},
                 {"t", time_number(seconds(a.alarm.time_ns))},
                 {"severity", word(severity_of(a.alarm.kind))},
                 {"text", outputs::alarm_words(a.alarm, stream)},
                 {"closure", a.last_closure != 0 ? Json(a.last_closure) : Json(nullptr)},
                 {"channel",
                  of_channel ? Json(channel_name(a.alarm.channel, stream.ride_height_names)) : Json(nullptr)},
                 {"active", a.active},
                 {"acknowledged", a.acknowledged},
                 {"by_s", number_if(a.acknowledged, a.acknowledged_by_s)},
                 {"burst", a.burst},
                 {"times", a.times},
                 {"stream", a.stream}});
}

std::string message_of(std::string_view kind, std::string_view object) {
    return R"({"kind":")" + std::string(kind) + "\"," + std::string(object.substr(1));
}

std::string list_message(std::string_view kind, std::span<const std::string> objects) {
    std::string text = R"({"kind":")" + std::string(kind) + R"(","list":[)";
    for (std::size_t i = 0; i < objects.size(); ++i) {
        if (i > 0) text += ',';
        text += objects[i];
    }
    return text + "]}";
}

std::string acknowledged_json(const RailAlarm& alarm) {
    return dump({{"kind", "alarm_acknowledged"}, {"id", alarm.id}, {"by_s", alarm.acknowledged_by_s}});
}

std::string health_json(const Health& health, const StreamInfo& stream) {
    Json list = Json::array();
    for (std::size_t i = 0; i < kChannelCount; ++i) {
        const bool announced = ((stream.channels >> i) & 1U) != 0;
        if (announced || health.table[i].samples > 0)
            list.push_back(json(static_cast<Channel>(i), health.table[i], health.time_ns, stream));
    }
    return dump(
        {{"kind", "health"}, {"t", time_number(seconds(health.time_ns))}, {"channels", std::move(list)}});
}

std::string end_json(const End& end) {
    Json summary = Json::parse(end.summary, nullptr, false);
    return dump({{"kind", "end"},
                 {"complete", end.complete},
                 {"conditions", json(end.conditions)},
                 {"summary", summary.is_discarded() ? Json(nullptr) : std::move(summary)}});
}

std::optional<std::uint32_t> acknowledgement(std::string_view text) {
    const Json j = Json::parse(text, nullptr, false);
    if (!j.is_object() || j.size() != 2) return std::nullopt;
    const auto what = j.find("do");
    const auto id = j.find("id");
    if (what == j.end() || id == j.end() || *what != "acknowledge" || !id->is_number_unsigned())
        return std::nullopt;
    const auto number = id->get<std::uint64_t>();
    if (number > std::numeric_limits<std::uint32_t>::max()) return std::nullopt;
    return static_cast<std::uint32_t>(number);
}

std::string inside_html(std::string_view json) {
    std::string text;
    text.reserve(json.size());
    for (const char c : json) {
        if (c == '<') {
            text += "\\u003c";  // "<" stands only in strings of a JSON text
        } else {
            text += c;
        }
    }
    return text;
}

std::string quoted(std::string_view text) {
    return dump(Json(text));
}

}  // namespace holdfast::wall
