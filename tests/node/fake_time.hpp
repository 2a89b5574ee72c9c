// SPDX-License-Identifier: MIT
// A clock that moves only when somebody sleeps on it or works.
#pragma once

#include <vector>

#include "firmware_host/node/pacer.hpp"

namespace holdfast::testing {

class FakeTime final : public node::Time {
  public:
    std::int64_t now_ns() override { return now_ns_; }
    void sleep_until_ns(std::int64_t time_ns) override {
        slept_until_ns.push_back(time_ns);
        now_ns_ = time_ns - wakes_early_ns;
        wakes_early_ns = 0;
    }
    void work(std::int64_t for_ns) { now_ns_ += for_ns; }

    std::vector<std::int64_t> slept_until_ns;
    std::int64_t wakes_early_ns = 0;  // once, as for a signal

  private:
    std::int64_t now_ns_ = 1'000'000'000'000;
};

inline constexpr std::int64_t kFakeStart_ns = 1'000'000'000'000;

}  // namespace holdfast::testing
