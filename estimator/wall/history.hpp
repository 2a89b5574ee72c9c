// SPDX-License-Identifier: MIT
// The traces of the outing so far, at a resolution that its memory can hold.
#pragma once

#include <cstddef>
#include <cstdint>
#include <deque>
#include <vector>

#include "estimator/wall/messages.hpp"

namespace holdfast::wall {

inline constexpr double kHistoryStep_s = 0.1;

// For those who come late: finished minutes as texts, made once, 10 Hz for the newest `fine_minutes` and 1 Hz
// before them. An hour takes 5 MB, the hours beyond the third 0.5 MB each.
class HistoryTexts {
  public:
    explicit HistoryTexts(std::size_t fine_minutes = 180) : fine_minutes_(fine_minutes) {}

    void add(const Row& row);
    // The whole, in order; the running minute's text is made anew.
    [[nodiscard]] std::vector<Text> texts() const;
    [[nodiscard]] std::size_t bytes() const;

  private:
    static constexpr std::size_t kRowsAMinute = 600;
    struct Minute {
        Text fine;
        Text coarse;
    };
    void finish_minute();

    std::size_t fine_minutes_;
    std::vector<Text> old_;  // coarse
    std::deque<Minute> recent_;
    std::vector<Row> running_;
};

// For the report: never more rows than its capacity; when full, every other row goes and the step doubles.
class ThinnedHistory {
  public:
    explicit ThinnedHistory(std::size_t capacity = 8000) : capacity_(capacity) {}

    void add(const Row& row);
    [[nodiscard]] std::string json() const {
        return history_json(rows_, kHistoryStep_s * static_cast<double>(stride_));
    }
    // The row of this instant where it was kept, else nullptr; good until the next add().
    [[nodiscard]] Row* find(std::int64_t time_ns);
    [[nodiscard]] std::size_t size() const { return rows_.size(); }

  private:
    std::size_t capacity_;
    std::uint64_t stride_ = 1;  // of the rows that come, each stride-th is kept
    std::uint64_t seen_ = 0;
    std::vector<Row> rows_;
};

}  // namespace holdfast::wall
