// SPDX-License-Identifier: MIT
#include "estimator/wall/history.hpp"

#include <algorithm>
#include <utility>

namespace holdfast::wall {
namespace {

constexpr std::size_t kCoarse = 10;  // rows of 10 Hz for one of 1 Hz

std::vector<Row> every(const std::vector<Row>& rows, std::size_t stride) {
    std::vector<Row> out;
    for (std::size_t i = 0; i < rows.size(); i += stride) out.push_back(rows[i]);
    return out;
}

Text text_of(std::span<const Row> rows, double step_s) {
    return std::make_shared<const std::string>(history_json(rows, step_s));
}

}  // namespace

void HistoryTexts::add(const Row& row) {
    running_.push_back(row);
    if (running_.size() == kRowsAMinute) finish_minute();
}

void HistoryTexts::finish_minute() {
    recent_.push_back({text_of(running_, kHistoryStep_s),
                       text_of(every(running_, kCoarse), kHistoryStep_s * static_cast<double>(kCoarse))});
    running_.clear();
    if (recent_.size() <= fine_minutes_) return;
    old_.push_back(std::move(recent_.front().coarse));
    recent_.pop_front();
}

std::vector<Text> HistoryTexts::texts() const {
    std::vector<Text> all = old_;
    for (const Minute& minute : recent_) all.push_back(minute.fine);
    all.push_back(text_of(running_, kHistoryStep_s));
    return all;
}

std::size_t HistoryTexts::bytes() const {
    std::size_t sum = running_.capacity() * sizeof(Row);
    for (const Text& text : old_) sum += text->size();
    for (const Minute& minute : recent_) sum += minute.fine->size() + minute.coarse->size();
    return sum;
}

void ThinnedHistory::add(const Row& row) {
    if (seen_++ % stride_ != 0) return;
    rows_.push_back(row);
    if (rows_.size() < capacity_) return;
    rows_ = every(rows_, 2);
    stride_ *= 2;
}

Row* ThinnedHistory::find(std::int64_t time_ns) {
    const auto at = std::lower_bound(rows_.begin(), rows_.end(), time_ns,
                                     [](const Row& row, std::int64_t time) { return row.time_ns < time; });
    return at != rows_.end() && at->time_ns == time_ns ? &*at : nullptr;
}

}  // namespace holdfast::wall
