// SPDX-License-Identifier: MIT
// When a frame is due: source time laid on the clock at a pace. The schedule is absolute, so that lateness
// does not add up; how late it was is kept, since it tells whether the machine keeps up.
#pragma once

#include <cstdint>
#include <optional>

namespace holdfast::node {

// The clock, so that tests need none.
class Time {
  public:
    virtual ~Time() = default;
    [[nodiscard]] virtual std::int64_t now_ns() = 0;
    // May come back early when a signal comes.
    virtual void sleep_until_ns(std::int64_t time_ns) = 0;
};

class SteadyTime final : public Time {
  public:
    std::int64_t now_ns() override;
    void sleep_until_ns(std::int64_t time_ns) override;
};

class Pacer {
  public:
    // pace: source seconds a second; 0: as fast as it goes. `time` has to outlive the pacer.
    Pacer(double pace, Time& time) : pace_(pace), time_(time) {}

    // Sleeps until this source time is due. The first call is due at once and starts the schedule. False: it
    // is not yet due, a signal came.
    [[nodiscard]] bool wait_for(std::int64_t source_time_ns);

    [[nodiscard]] double pace() const { return pace_; }
    [[nodiscard]] std::int64_t worst_lateness_ns() const { return worst_lateness_ns_; }
    // Times that it was later than kSlip_ns.
    [[nodiscard]] std::uint64_t slips() const { return slips_; }

    static constexpr std::int64_t kSlip_ns = 10'000'000;

  private:
    double pace_;
    Time& time_;
    std::optional<std::int64_t> first_source_ns_;
    std::int64_t start_ns_ = 0;
    std::int64_t worst_lateness_ns_ = 0;
    std::uint64_t slips_ = 0;
};

}  // namespace holdfast::node
