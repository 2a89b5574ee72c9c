// SPDX-License-Identifier: MIT
// From the thread that estimates to the one that serves. Its lock is held for one push or one swap and never
// while anything is written, read or formatted.
#pragma once

#include <cstdint>
#include <mutex>
#include <utility>
#include <vector>

#include "estimator/wall/item.hpp"

namespace holdfast::wall {

class Inbox {
  public:
    // Items waiting beyond which those that the next one replaces are left out. What is kept for good (the
    // 10 Hz history, closings, alarms, ends) is taken always: it grows no faster than the outing.
    static constexpr std::size_t kCapacity = 4096;

    void post(Item item) {
        const std::lock_guard lock(mutex_);
        if (items_.size() >= kCapacity && may_be_left_out(item)) {
            ++left_out_;
        } else {
            items_.push_back(std::move(item));
        }
    }

    [[nodiscard]] std::vector<Item> take() {
        const std::lock_guard lock(mutex_);
        return std::exchange(items_, {});
    }

    [[nodiscard]] std::uint64_t left_out() const {
        const std::lock_guard lock(mutex_);
        return left_out_;
    }

  private:
    static bool may_be_left_out(const Item& item) {
        if (const auto* row = std::get_if<Row>(&item)) return !row->history;
        if (const auto* regrowth = std::get_if<std::shared_ptr<const ZonedRegrowth>>(&item))
            return !(*regrowth)->curve.final;
        return std::holds_alternative<std::shared_ptr<const Health>>(item);
    }

    mutable std::mutex mutex_;
    std::vector<Item> items_;
    std::uint64_t left_out_ = 0;
};

}  // namespace holdfast::wall
