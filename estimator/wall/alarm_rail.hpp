// SPDX-License-Identifier: MIT
// Alarms as an operator needs them, after the practice of ISA-18.2 and IEC 62682: an alarm stays until a
// person has acknowledged it, whether or not its condition has gone; a condition that comes and goes is one
// alarm; the first alarm of a burst stays on top, for the others are mostly its consequences. Times are
// source time in nanoseconds, passed in; no clock.
#pragma once

#include <cstdint>
#include <optional>
#include <vector>

#include "estimator/core/results.hpp"

namespace holdfast::wall {

enum class Severity : std::uint8_t { high, medium, low };

// Short at the brakes is what the tool is for. What could not be computed, or stopped coming, is medium; a
// slow reattachment that was still in time is low.
[[nodiscard]] Severity severity_of(core::AlarmKind kind);

struct RailAlarm {
    std::uint32_t id = 0;     // 1, 2, ... over all streams
    std::uint32_t burst = 0;  // id of the first alarm of its burst
    std::uint32_t stream = 1;
    core::Alarm alarm;               // the first occurrence
    std::uint32_t last_closure = 0;  // of the newest occurrence; 0 where it is no closing's
    std::uint32_t times = 1;         // occurrences while it stood
    bool active = true;              // its condition still holds
    bool acknowledged = false;
    double acknowledged_by_s = 0.0;  // wall clock, seconds since 1970; 0 where it is not

    [[nodiscard]] bool standing() const { return active || !acknowledged; }
};

struct RailLimits {
    std::int64_t distrust_on_delay_ns =
        1'000'000'000;  // a sensor that is trusted again at once raises nothing
    // A condition has gone only when it has stayed away for so long.
    std::int64_t off_delay_ns = 10'000'000'000;
    // An alarm within so much of the one before belongs to its burst.
    std::int64_t burst_ns = 3'000'000'000;
    // Dead band of closings: short or slow is over when a later closing is less likely than this to be so.
    double clear_probability = 0.5;
};

// Conditions that belong together are one alarm while it stands: a channel's distrust; stale data, whatever
// the channel; closings unknown at the brakes; slow reattachments. Each closing short at the brakes is an
// alarm of its own.
class AlarmRail {
  public:
    explicit AlarmRail(RailLimits limits = {}) : limits_(limits) {}

    // The engine, or the receiver of a silent link, says that a condition holds.
    void raise(const core::Alarm& alarm);
    // What may end a condition. Sensors: the newest health. Stale: data flow and are whole. Closing: its
    // record, judged at the brakes.
    void see_health(std::int64_t time_ns, const core::HealthTable& health);
    void see_data(std::int64_t time_ns, bool stale);
    void see_closure(const core::Closure& closure);
    // A stream begins, its time anew. What nobody has acknowledged stays; no condition of before holds.
    void begin_stream(std::uint32_t stream);

    // False: there is no such alarm waiting for it.
    bool acknowledge(std::uint32_t id, double wall_clock_s);

    // Alarms as they stand after each change since the last call, oldest change first.
    struct Change {
        RailAlarm alarm;
        bool acknowledgement = false;
    };
    [[nodiscard]] std::vector<Change> take_changes();

    // Every alarm that stands, newest burst first; within a burst its first one on top.
    [[nodiscard]] std::vector<RailAlarm> standing() const;

  private:
    struct Entry {
        RailAlarm alarm;
        std::optional<std::int64_t> gone_ns;  // the condition is away since; not yet taken for gone
    };
    struct Waiting {
        core::Alarm alarm;
        std::int64_t since_ns = 0;
    };

    [[nodiscard]] Entry* standing_like(const core::Alarm& alarm);
    void put_up(const core::Alarm& alarm);
    void come_back(Entry& entry, const core::Alarm& alarm);
    void went_away(Entry& entry, std::int64_t time_ns);
    void clear(Entry& entry);
    void changed(const Entry& entry, bool acknowledgement = false);
    void forget();

    RailLimits limits_;
    std::vector<Entry> entries_;    // those that stand, oldest first
    std::vector<Waiting> waiting_;  // for their on-delay
    std::vector<Change> changes_;
    std::uint32_t next_id_ = 1;
    std::uint32_t stream_ = 1;
    std::optional<std::int64_t> newest_ns_;  // of the newest alarm put up in this stream
    std::uint32_t burst_ = 0;
};

}  // namespace holdfast::wall
