// SPDX-License-Identifier: MIT
// The engine: one object for live and replay. Feed it frames in the order of their time; read the estimate after any
// step; take closings and alarms as they come. No I/O, no heap, no exceptions, no clock: the same frames give the
// same bits.
#pragma once

#include <cstdint>
#include <optional>

#include "estimator/core/car.hpp"
#include "estimator/core/results.hpp"
#include "estimator/core/settings.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::core {

enum class StepResult : std::uint8_t {
    done,
    repeated,       // time equals the frame before: counted, left out
    out_of_order,   // time before the frame before: counted, left out
};

class Engine {
  public:
    Engine(const Car& car, const Settings& settings);

    [[nodiscard]] StepResult step(const Frame& frame);

    // The input has ended: closings still being judged are judged with what there is.
    void finish();

    [[nodiscard]] const Estimate& estimate() const;
    [[nodiscard]] const HealthTable& health() const;

    // Oldest closing or alarm not yet taken.
    [[nodiscard]] std::optional<Closure> take_closure();
    [[nodiscard]] std::optional<Alarm> take_alarm();
    // Closings or alarms lost because nobody took them; 0 in a sound program.
    [[nodiscard]] std::uint64_t overrun() const;
};

}  // namespace holdfast::core
