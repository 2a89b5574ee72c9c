// SPDX-License-Identifier: MIT
#include "estimator/wall/observer.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <utility>

#include "estimator/outputs/line_file.hpp"
#include "estimator/wall/report.hpp"

namespace holdfast::wall {
namespace {

constexpr double kUnknown = std::numeric_limits<double>::quiet_NaN();
constexpr std::int64_t kRowPeriodNs = 20'000'000;  // the grid of estimates.csv
constexpr std::int64_t kHistoryPeriodNs = 100'000'000;
constexpr std::int64_t kHealthPeriodNs = 500'000'000;
constexpr std::chrono::milliseconds kGrowingPeriod{50};

constexpr std::array<Channel, 4> kLoads{Channel::load_fl, Channel::load_fr, Channel::load_rl,
                                        Channel::load_rr};

// True at the first time at or after each multiple of the period.
bool due(std::int64_t time_ns, std::int64_t& next_ns, std::int64_t period_ns) {
    if (time_ns < next_ns) return false;
    std::int64_t whole = time_ns / period_ns;
    if (time_ns % period_ns < 0) --whole;
    next_ns = (whole + 1) * period_ns;
    return true;
}

void put(const core::Estimate& e, Row& row) {
    const auto set = [&](std::size_t place, const core::Quantity& q) {
        row.value[place] = q.value;
        row.value[place + 1] = q.sd;
    };
    row.flags = e.flags;
    row.value[column("speed")] = e.speed_mps;
    row.value[column("attached")] = e.attached.value;
    set(column("cla_front"), e.cla_front_m2);
    set(column("cla_rear"), e.cla_rear_m2);
    set(column("cda"), e.cda_m2);
    set(column("downforce_front"), e.downforce_front_n);
    set(column("downforce_rear"), e.downforce_rear_n);
    set(column("drag"), e.drag_n);
}

double wall_clock_s() {
    return std::chrono::duration<double>(std::chrono::system_clock::now().time_since_epoch()).count();
}

}  // namespace

Observer::Observer(const outputs::Folder& folder, Hello hello, Wall& wall)
    : folder_(folder),
      hello_(std::make_shared<const Hello>(std::move(hello))),
      rail_(wall.rail),
      server_(wall.server.get()) {
    row_.lap = row_.lap_distance_m = kUnknown;
    row_.value.fill(kUnknown);
    corner_load_n_.fill(kUnknown);
    tell(hello_);
    rail_.begin_stream(hello_->stream);
    tell_alarms();
}

void Observer::on_frame(const Frame& frame) {
    remember(frame);
    if (!started_) {
        started_ = true;
        next_row_ns_ = next_history_ns_ = next_health_ns_ = frame.time_ns;
    }
    if (due(frame.time_ns, next_row_ns_, kRowPeriodNs)) {
        const core::Estimate& estimate = inquiry_->estimate();
        row_.history = due(frame.time_ns, next_history_ns_, kHistoryPeriodNs);
        tell_row(estimate);
        rail_.see_data(frame.time_ns, (estimate.flags & core::kStale) != 0);
        tell_alarms();
        if ((estimate.flags & core::kReattaching) != 0) show_growing();
        poll();
    }
    if (due(frame.time_ns, next_health_ns_, kHealthPeriodNs)) tell_health(frame.time_ns);
}

// Channels come at rates of their own: the newest value stands until the next.
void Observer::remember(const Frame& frame) {
    conditions_.take(frame);
    row_.time_ns = frame.time_ns;
    const auto keep = [&](Channel channel, double& place) {
        if (frame.has(channel)) place = frame.get(channel);
    };
    for (std::size_t i = 0; i < kLoads.size(); ++i) keep(kLoads[i], corner_load_n_[i]);
    keep(Channel::flap_position, row_.value[column("flap")]);
    keep(Channel::lap, row_.lap);
    keep(Channel::lap_distance, row_.lap_distance_m);
}

void Observer::tell_row(const core::Estimate& estimate) {
    conditions_.take(estimate);
    put(estimate, row_);
    row_.value[column("load_front")] = corner_load_n_[0] + corner_load_n_[1];
    row_.value[column("load_rear")] = corner_load_n_[2] + corner_load_n_[3];
    if (row_.history) history_.add(row_);
    tell(row_);
}

void Observer::on_estimate(const core::Estimate& estimate) {
    if (Row* row = history_.find(estimate.time_ns)) put(estimate, *row);
}

void Observer::tell_health(std::int64_t time_ns) {
    rail_.see_health(time_ns, inquiry_->health());
    tell_alarms();
    tell(std::make_shared<const Health>(Health{time_ns, inquiry_->health()}));
}

bool Observer::showing() const {
    return server_ != nullptr && server_->has_viewers();
}

void Observer::show_growing() {
    if (!showing()) return;
    const auto now = std::chrono::steady_clock::now();
    if (now < next_growing_) return;
    next_growing_ = now + kGrowingPeriod;
    if (!inquiry_->regrowth(curve_) || curve_.final) return;
    server_->post(std::make_shared<const ZonedRegrowth>(ZonedRegrowth{curve_, 0}));
}

void Observer::on_closure(const core::Closure& closure) {
    tell(closure);
    rail_.see_closure(closure);
    tell_alarms();
    if (!closure.reattachment_known) return;
    if (!inquiry_->regrowth(curve_) || curve_.closure != closure.number) return;
    curve_.final = true;
    tell(std::make_shared<const ZonedRegrowth>(ZonedRegrowth{curve_, closure.zone}));
}

void Observer::on_alarm(const core::Alarm& alarm) {
    rail_.raise(alarm);
    tell_alarms();
}

void Observer::on_end(const outputs::RunEnd& end) {
    if (started_) tell_health(row_.time_ns);
    link_.state = LinkStatus::State::ended;
    set_link(link_);
    tell(std::make_shared<const End>(End{end.complete, folder_.summary(), conditions_}));
    outputs::write_whole(
        folder_.path() / "report.html",
        report_html(outing_.messages({{std::make_shared<const std::string>(history_.json())}})));
}

void Observer::set_link(const LinkStatus& link) {
    link_ = link;
    if (server_ != nullptr) server_->post(link);
}

void Observer::poll() {
    if (server_ == nullptr) return;
    for (const std::uint32_t id : server_->take_acknowledgements())
        if (rail_.acknowledge(id, wall_clock_s())) tell_alarms();
}

void Observer::tell_alarms() {
    for (const AlarmRail::Change& change : rail_.take_changes()) tell(change);
}

void Observer::tell(Item item) {
    outing_.take(item);
    if (server_ != nullptr) server_->post(std::move(item));
}

}  // namespace holdfast::wall
