// SPDX-License-Identifier: MIT
#include "estimator/wall/audience.hpp"

#include <algorithm>
#include <string>
#include <utility>

namespace holdfast::wall {
namespace {

Text shared(std::string text) {
    return std::make_shared<const std::string>(std::move(text));
}

}  // namespace

void Audience::take(std::span<const Item> items, std::span<Viewer* const> viewers) {
    for (const Item& item : items) {
        if (const auto* row = std::get_if<Row>(&item)) {
            take_row(*row);
        } else if (const auto* link = std::get_if<LinkStatus>(&item)) {
            link_ = *link;
        } else {
            take_event(item, viewers);
        }
    }
}

void Audience::take_row(const Row& row) {
    newest_ = row;
    now_texts_.clear();
    if (recent_.size() == 2 * kRecentRows) recent_.erase(recent_.begin(), recent_.begin() + kRecentRows);
    recent_.push_back(row);
    if (row.history) {
        history_.add(row);
        thin_.push_back({rows_, row});
        if (thin_.size() > kRecentThin) thin_.pop_front();
    }
    ++rows_;
}

void Audience::begin_again() {
    history_ = HistoryTexts{};
    recent_.clear();
    thin_.clear();
    newest_ = Row{};
    growing_.reset();
    health_.reset();
    growing_slot_.text.reset();
    health_slot_.text.reset();
    now_texts_.clear();
}

void Audience::take_event(const Item& item, std::span<Viewer* const> viewers) {
    outing_.take(item);
    Text text;
    if (std::holds_alternative<std::shared_ptr<const Hello>>(item)) {
        begin_again();
        for (Viewer* viewer : viewers) viewer->in_sync_ = false;
    } else if (const auto* closure = std::get_if<core::Closure>(&item)) {
        text = shared(message_of("closure", closure_object(*closure, outing_.hello().flap_chord_m)));
    } else if (const auto* regrowth = std::get_if<std::shared_ptr<const ZonedRegrowth>>(&item)) {
        if ((*regrowth)->curve.final) {
            growing_.reset();
            text = shared(message_of("regrowth", regrowth_object(**regrowth)));
        } else {
            growing_ = *regrowth;
            growing_slot_ = {growing_slot_.version + 1, nullptr};
        }
    } else if (const auto* change = std::get_if<AlarmRail::Change>(&item)) {
        text = shared(change->acknowledgement
                          ? acknowledged_json(change->alarm)
                          : message_of("alarm", alarm_object(change->alarm, outing_.hello().channels)));
    } else if (const auto* health = std::get_if<std::shared_ptr<const Health>>(&item)) {
        health_ = *health;
        health_slot_ = {health_slot_.version + 1, nullptr};
    } else if (const auto* end = std::get_if<std::shared_ptr<const End>>(&item)) {
        text = shared(end_json(**end));
    }
    if (!text) return;
    for (Viewer* viewer : viewers) {
        if (!viewer->in_sync_) continue;
        if (viewer->events_.size() == Viewer::kEvents) {
            viewer->in_sync_ = false;
        } else {
            viewer->events_.push_back(text);
        }
    }
}

void Audience::tick(double age_s, bool heartbeat, std::span<Viewer* const> viewers) {
    age_s_ = age_s;
    now_texts_.clear();
    for (Viewer* viewer : viewers)
        viewer->now_due_ = viewer->now_due_ || heartbeat || viewer->cursor_ < rows_;
}

void Audience::resynchronise(Viewer& viewer) {
    if (viewer.joined_) ++viewer.resynchronised_;
    viewer.joined_ = true;
    const std::vector<Text> all = outing_.messages(history_.texts());
    viewer.catching_up_.assign(all.begin(), all.end());
    viewer.events_.clear();
    viewer.cursor_ = rows_;
    viewer.health_seen_ = health_slot_.version;
    viewer.in_sync_ = true;
}

Text Audience::next(Viewer& viewer) {
    if (!outing_.begun()) return nullptr;
    // The outing so far is finished with before another begins, however slow the viewer.
    if (viewer.catching_up_.empty()) {
        const std::uint64_t kept_from = thin_.empty() ? rows_ : thin_.front().number;
        const bool lost_touch = viewer.cursor_ < kept_from && viewer.cursor_ + recent_.size() < rows_;
        if (!viewer.in_sync_ || lost_touch) resynchronise(viewer);
    }
    for (std::deque<Text>* queue : {&viewer.catching_up_, &viewer.events_}) {
        if (queue->empty()) continue;
        Text text = std::move(queue->front());
        queue->pop_front();
        return text;
    }
    if (growing_ && viewer.growing_seen_ != growing_slot_.version) {
        viewer.growing_seen_ = growing_slot_.version;
        if (!growing_slot_.text)
            growing_slot_.text = shared(message_of("regrowth", regrowth_object(*growing_)));
        return growing_slot_.text;
    }
    if (health_ && viewer.health_seen_ != health_slot_.version) {
        viewer.health_seen_ = health_slot_.version;
        if (!health_slot_.text) health_slot_.text = shared(health_json(*health_, outing_.hello().channels));
        return health_slot_.text;
    }
    if (!viewer.now_due_) return nullptr;
    viewer.now_due_ = false;
    return now_for(viewer);
}

Text Audience::now_for(Viewer& viewer) {
    const std::uint64_t from = std::exchange(viewer.cursor_, rows_);
    for (const NowText& made : now_texts_)
        if (made.from == from) return made.text;

    const std::size_t behind = static_cast<std::size_t>(rows_ - from);
    const std::size_t whole = std::min({behind, recent_.size(), kRecentRows});
    const std::uint64_t first_whole = rows_ - whole;
    std::vector<Row> thinned;
    if (whole < behind) {
        for (const Numbered& old : thin_)
            if (old.number >= from && old.number < first_whole) thinned.push_back(old.row);
        ++viewer.thinned_;
    }
    Now now;
    now.thinned = thinned;
    now.rows = std::span(recent_).last(whole);
    now.newest = newest_;
    now.any = !recent_.empty();
    now.age_s = age_s_;
    now.link = link_;
    now_texts_.push_back({from, shared(now_json(now))});
    return now_texts_.back().text;
}

}  // namespace holdfast::wall
