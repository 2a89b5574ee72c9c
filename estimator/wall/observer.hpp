// SPDX-License-Identifier: MIT
// A run's results onto the wall: 50 rows a second of the traces, closings with their regrowths, alarms on
// their rail, health twice a second. Gathers what the report shows; hands all of it to the server where there
// is one. Lives on the thread that estimates.
#pragma once

#include <chrono>
#include <cstdint>
#include <filesystem>
#include <memory>

#include "estimator/outputs/folder.hpp"
#include "estimator/outputs/sink.hpp"
#include "estimator/wall/conditions.hpp"
#include "estimator/wall/history.hpp"
#include "estimator/wall/item.hpp"
#include "estimator/wall/outing_so_far.hpp"
#include "estimator/wall/wall.hpp"

namespace holdfast::wall {

class Observer : public outputs::Sink {
  public:
    // One for each stream. The folder must stand before this sink in the run's list: its summary and its path
    // are used at the end. The wall outlives the streams.
    Observer(const outputs::Folder& folder, Hello hello, Wall& wall);

    void on_begin(outputs::Inquiry& inquiry) override { inquiry_ = &inquiry; }
    void on_frame(const Frame& frame) override;
    // Where the estimates come smoothed at the end, the report shows those; the page stays with what was
    // known at each moment.
    void on_estimate(const core::Estimate& estimate) override;
    void on_closure(const core::Closure& closure) override;
    void on_alarm(const core::Alarm& alarm) override;
    // Writes report.html into the folder.
    void on_end(const outputs::RunEnd& end) override;

    void set_link(const LinkStatus& link);
    // Takes in what viewers have acknowledged. For the loops: also while nothing comes.
    void poll();

  private:
    void remember(const Frame& frame);
    void tell(Item item);
    void tell_alarms();
    void tell_row(const core::Estimate& estimate);
    void tell_health(std::int64_t time_ns);
    void show_growing();
    [[nodiscard]] bool showing() const;

    const outputs::Folder& folder_;
    std::shared_ptr<const Hello> hello_;
    AlarmRail& rail_;
    Server* server_;  // null: no page
    LinkStatus link_;
    outputs::Inquiry* inquiry_ = nullptr;
    OutingSoFar outing_;
    ThinnedHistory history_;
    Conditions conditions_;
    Row row_;  // the newest values of what the frames say
    std::array<double, 4> corner_load_n_;
    bool started_ = false;
    std::int64_t next_row_ns_ = 0;
    std::int64_t next_history_ns_ = 0;
    std::int64_t next_health_ns_ = 0;
    std::chrono::steady_clock::time_point next_growing_{};  // the viewers' clock: it limits the cost
    core::Regrowth curve_;                                  // large
};

}  // namespace holdfast::wall
