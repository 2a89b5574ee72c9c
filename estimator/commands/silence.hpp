// SPDX-License-Identifier: MIT
// Silence of the link by the receiver's own clock: source time stands still when nothing comes, so the engine
// cannot notice it.
#pragma once

#include <chrono>
#include <optional>
#include <utility>

namespace holdfast::commands {

class Silence {
  public:
    using Clock = std::chrono::steady_clock;
    using Seconds = std::chrono::duration<double>;
    static constexpr std::chrono::milliseconds kLimit{1000};

    explicit Silence(Clock::time_point now) : heard_(now) {}

    // Nothing has come. True once for each silence: when it has just become too long.
    [[nodiscard]] bool begins(Clock::time_point now) {
        if (silent_ || now - heard_ < kLimit) return false;
        silent_ = true;
        return true;
    }
    // Something has come. The silence's length, where one had begun.
    [[nodiscard]] std::optional<Seconds> ends(Clock::time_point now) {
        const Seconds length = now - std::exchange(heard_, now);
        if (!std::exchange(silent_, false)) return std::nullopt;
        return length;
    }

    [[nodiscard]] bool lasts() const { return silent_; }

  private:
    Clock::time_point heard_;
    bool silent_ = false;
};

}  // namespace holdfast::commands
