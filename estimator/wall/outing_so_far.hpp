// SPDX-License-Identifier: MIT
// What has happened in the outing: for whoever joins late, and for the report. Everything but the traces
// (history.hpp). Memory is bounded by the number of closings; texts are made once and shared.
#pragma once

#include <cstdint>
#include <deque>
#include <map>
#include <memory>
#include <span>
#include <string>
#include <vector>

#include "estimator/wall/item.hpp"
#include "estimator/wall/messages.hpp"

namespace holdfast::wall {

class OutingSoFar {
  public:
    // Final regrowths remembered, the oldest go first; closings and alarms are remembered all.
    static constexpr std::size_t kRegrowths = 512;

    // A Hello forgets all but the alarms that still stand. Rows and link are not for here.
    void take(const Item& item);

    // The messages that tell it all: hello, the history as given, closures, regrowths, alarms, health, end.
    [[nodiscard]] std::vector<Text> messages(std::span<const Text> history);

    [[nodiscard]] const Hello& hello() const { return *hello_; }
    [[nodiscard]] bool begun() const { return hello_ != nullptr; }

  private:
    void take_hello(const std::shared_ptr<const Hello>& hello);
    [[nodiscard]] std::string alarms_json() const;

    std::shared_ptr<const Hello> hello_ = nullptr;
    std::vector<std::string> closures_;  // JSON objects
    std::deque<std::string> regrowths_;
    std::map<std::uint32_t, RailAlarm> alarms_;
    std::shared_ptr<const Health> health_;
    std::shared_ptr<const End> end_;
    // Made when asked for, kept until something changes.
    Text hello_text_, closures_text_, regrowths_text_, alarms_text_, health_text_, end_text_;
};

}  // namespace holdfast::wall
