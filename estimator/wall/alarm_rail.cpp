// SPDX-License-Identifier: MIT
#include "estimator/wall/alarm_rail.hpp"

#include <algorithm>
#include <cmath>
#include <utility>

namespace holdfast::wall {

using core::AlarmKind;

Severity severity_of(AlarmKind kind) {
    switch (kind) {
        case AlarmKind::short_at_brakes:
            return Severity::high;
        case AlarmKind::slow_reattachment:
            return Severity::low;
        case AlarmKind::unknown_at_brakes:
        case AlarmKind::data_stale:
        case AlarmKind::sensor_distrusted:
            break;
    }
    return Severity::medium;
}

namespace {

bool alike(const core::Alarm& a, const core::Alarm& b) {
    if (a.kind != b.kind) return false;
    switch (a.kind) {
        case AlarmKind::short_at_brakes:
            return a.closure == b.closure;
        case AlarmKind::sensor_distrusted:
            return a.channel == b.channel;
        case AlarmKind::unknown_at_brakes:
        case AlarmKind::slow_reattachment:
        case AlarmKind::data_stale:
            break;
    }
    return true;
}

// The condition of a closing is over when a later one is judged and is not so.
bool is_over(const RailAlarm& alarm, const core::Closure& later, double clear_probability) {
    if (later.number <= alarm.last_closure || !later.reattachment_known) return false;
    switch (alarm.alarm.kind) {
        case AlarmKind::short_at_brakes:
            return later.braked && later.probability_short < clear_probability;
        case AlarmKind::unknown_at_brakes:
            return later.braked;
        case AlarmKind::slow_reattachment:
            return later.whole && later.probability_slow < clear_probability;
        case AlarmKind::data_stale:
        case AlarmKind::sensor_distrusted:
            break;
    }
    return false;
}

}  // namespace

void AlarmRail::raise(const core::Alarm& alarm) {
    if (Entry* entry = standing_like(alarm)) {
        come_back(*entry, alarm);
    } else if (alarm.kind == AlarmKind::sensor_distrusted && limits_.distrust_on_delay_ns > 0) {
        const bool waits = std::any_of(waiting_.begin(), waiting_.end(),
                                       [&](const Waiting& w) { return alike(w.alarm, alarm); });
        if (!waits) waiting_.push_back({alarm, alarm.time_ns});
    } else {
        put_up(alarm);
    }
}

void AlarmRail::see_health(std::int64_t time_ns, const core::HealthTable& health) {
    const auto distrusted = [&](const core::Alarm& alarm) {
        return health[index(alarm.channel)].trust == core::Trust::distrusted;
    };
    std::erase_if(waiting_, [&](const Waiting& w) { return !distrusted(w.alarm); });
    const auto due = std::stable_partition(waiting_.begin(), waiting_.end(), [&](const Waiting& w) {
        return time_ns - w.since_ns < limits_.distrust_on_delay_ns;
    });
    const std::vector<Waiting> now(due, waiting_.end());
    waiting_.erase(due, waiting_.end());
    for (const Waiting& w : now) put_up(w.alarm);

    for (Entry& entry : entries_) {
        if (entry.alarm.alarm.kind != AlarmKind::sensor_distrusted || !entry.alarm.active) continue;
        if (distrusted(entry.alarm.alarm)) {
            entry.gone_ns.reset();
        } else {
            went_away(entry, time_ns);
        }
    }
    forget();
}

void AlarmRail::see_data(std::int64_t time_ns, bool stale) {
    for (Entry& entry : entries_) {
        if (entry.alarm.alarm.kind != AlarmKind::data_stale || !entry.alarm.active) continue;
        if (stale) {
            entry.gone_ns.reset();
        } else {
            went_away(entry, time_ns);
        }
    }
    forget();
}

void AlarmRail::see_closure(const core::Closure& closure) {
    for (Entry& entry : entries_)
        if (entry.alarm.active && is_over(entry.alarm, closure, limits_.clear_probability)) clear(entry);
    forget();
}

void AlarmRail::begin_stream(std::uint32_t stream) {
    stream_ = stream;
    waiting_.clear();
    newest_ns_.reset();
    for (Entry& entry : entries_)
        if (entry.alarm.active) clear(entry);
    forget();
}

bool AlarmRail::acknowledge(std::uint32_t id, double wall_clock_s) {
    const auto entry = std::find_if(entries_.begin(), entries_.end(), [&](const Entry& e) {
        return e.alarm.id == id && !e.alarm.acknowledged;
    });
    if (entry == entries_.end()) return false;
    entry->alarm.acknowledged = true;
    entry->alarm.acknowledged_by_s = wall_clock_s;
    changed(*entry, true);
    forget();
    return true;
}

std::vector<AlarmRail::Change> AlarmRail::take_changes() {
    return std::exchange(changes_, {});
}

std::vector<RailAlarm> AlarmRail::standing() const {
    std::vector<RailAlarm> alarms;
    for (const Entry& entry : entries_) alarms.push_back(entry.alarm);
    std::stable_sort(alarms.begin(), alarms.end(),
                     [](const RailAlarm& a, const RailAlarm& b) { return a.burst > b.burst; });
    return alarms;
}

AlarmRail::Entry* AlarmRail::standing_like(const core::Alarm& alarm) {
    for (Entry& entry : entries_)
        if (entry.alarm.stream == stream_ && alike(entry.alarm.alarm, alarm)) return &entry;
    return nullptr;
}

void AlarmRail::put_up(const core::Alarm& alarm) {
    Entry entry;
    entry.alarm.id = next_id_++;
    if (!newest_ns_ || alarm.time_ns - *newest_ns_ > limits_.burst_ns) burst_ = entry.alarm.id;
    newest_ns_ = alarm.time_ns;
    entry.alarm.burst = burst_;
    entry.alarm.stream = stream_;
    entry.alarm.alarm = alarm;
    entry.alarm.last_closure = alarm.closure;
    entries_.push_back(entry);
    changed(entry);
}

// The condition holds again. Within the off-delay it never went; the person who has acknowledged it knows. An
// alarm that nobody has acknowledged stays the one alarm.
void AlarmRail::come_back(Entry& entry, const core::Alarm& alarm) {
    entry.gone_ns.reset();
    const bool another_closing = alarm.closure != entry.alarm.last_closure;
    if (entry.alarm.active && !another_closing) return;
    entry.alarm.active = true;
    entry.alarm.last_closure = alarm.closure;
    ++entry.alarm.times;
    changed(entry);
}

void AlarmRail::went_away(Entry& entry, std::int64_t time_ns) {
    if (!entry.gone_ns) entry.gone_ns = time_ns;
    if (time_ns - *entry.gone_ns >= limits_.off_delay_ns) clear(entry);
}

void AlarmRail::clear(Entry& entry) {
    entry.alarm.active = false;
    entry.gone_ns.reset();
    changed(entry);
}

void AlarmRail::changed(const Entry& entry, bool acknowledgement) {
    changes_.push_back({entry.alarm, acknowledgement});
}

void AlarmRail::forget() {
    std::erase_if(entries_, [](const Entry& entry) { return !entry.alarm.standing(); });
}

}  // namespace holdfast::wall
