// SPDX-License-Identifier: MIT
// Who watches, and what each viewer is to be sent next. A viewer that keeps up gets everything. One that is
// slow gets, each time it can take something, the newest of what changes all the time, and every event in
// order. One that is too slow even for that is given the outing so far anew. What waits for a viewer is
// bounded whatever it does. No sockets here, no clock, one thread.
#pragma once

#include <cstdint>
#include <deque>
#include <span>
#include <vector>

#include "estimator/wall/history.hpp"
#include "estimator/wall/item.hpp"
#include "estimator/wall/messages.hpp"
#include "estimator/wall/outing_so_far.hpp"

namespace holdfast::wall {

class Audience;

class Viewer {
  public:
    static constexpr std::size_t kEvents = 128;  // that may wait; one more, and the viewer is resynchronised

    [[nodiscard]] std::size_t waiting() const { return catching_up_.size() + events_.size(); }
    [[nodiscard]] std::uint64_t resynchronised() const { return resynchronised_; }
    [[nodiscard]] std::uint64_t thinned() const {
        return thinned_;
    }  // messages with 10 Hz rows for the missed

  private:
    friend class Audience;

    bool joined_ = false;           // has been given the outing so far once
    bool in_sync_ = false;          // has been given the outing so far
    std::deque<Text> catching_up_;  // the outing so far, as it was when it was asked for
    std::deque<Text> events_;       // since then
    std::uint64_t growing_seen_ = 0;
    std::uint64_t health_seen_ = 0;
    std::uint64_t cursor_ = 0;  // first row that this viewer has not seen
    bool now_due_ = false;
    std::uint64_t resynchronised_ = 0;
    std::uint64_t thinned_ = 0;
};

class Audience {
  public:
    // Rows that a viewer may be behind: until the first, it misses none; until the second, it gets 10 Hz.
    static constexpr std::size_t kRecentRows = 600;   // 12 s at 50 Hz
    static constexpr std::size_t kRecentThin = 3000;  // 5 min at 10 Hz

    // What has happened, in order; `viewers` are those of now.
    void take(std::span<const Item> items, std::span<Viewer* const> viewers);

    // Time for another "now": `age_s` since the newest row came. Rows there are, or `heartbeat` to send one
    // without.
    void tick(double age_s, bool heartbeat, std::span<Viewer* const> viewers);

    // What the viewer is to be sent next; nullptr: nothing for now.
    [[nodiscard]] Text next(Viewer& viewer);

    [[nodiscard]] std::size_t history_bytes() const { return history_.bytes(); }

  private:
    struct Numbered {
        std::uint64_t number = 0;
        Row row;
    };
    struct Slot {  // the newest of a kind, its text made when the first viewer wants it
        std::uint64_t version = 0;
        Text text;
    };

    void take_row(const Row& row);
    void take_event(const Item& item, std::span<Viewer* const> viewers);
    void begin_again();
    void resynchronise(Viewer& viewer);
    [[nodiscard]] Text now_for(Viewer& viewer);

    OutingSoFar outing_;
    HistoryTexts history_;
    std::uint64_t rows_ = 0;     // so far
    std::vector<Row> recent_;    // rows_ - recent_.size() .. rows_ - 1
    std::deque<Numbered> thin_;  // the 10 Hz rows among them and before them
    Row newest_;
    LinkStatus link_;
    double age_s_ = 0.0;
    std::shared_ptr<const ZonedRegrowth> growing_;
    std::shared_ptr<const Health> health_;
    Slot growing_slot_, health_slot_;
    // The texts of this tick, by the first row in them: viewers who keep up share one.
    struct NowText {
        std::uint64_t from = 0;
        Text text;
    };
    std::vector<NowText> now_texts_;
};

}  // namespace holdfast::wall
