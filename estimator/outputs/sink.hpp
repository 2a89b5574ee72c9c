// SPDX-License-Identifier: MIT
// Whoever listens to a run: files, terminal, wire. Each call has an empty default, so that a sink says only
// what it wants to hear. Calls come from one thread, in the order of source time.
#pragma once

#include <cstdint>
#include <optional>
#include <string>

#include "estimator/core/learned.hpp"
#include "estimator/core/regrowth.hpp"
#include "estimator/core/results.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::outputs {

// What a run has come to when it ends.
struct RunEnd {
    bool complete = true;                    // false: the input broke off, or was stopped, before its end
    std::string reason{};                    // why it is not complete, in words; empty where it is
    double duration_s = 0.0;                 // source time from the first frame to the last
    std::uint64_t frames = 0;                // taken by the engine
    std::uint64_t repeated = 0;              // frames with the time of the one before, left out
    std::uint64_t out_of_order = 0;          // frames with an earlier time, left out
    std::optional<core::Learned> learned{};  // of the car; nothing before the end
};

// What a sink may ask while one of its calls lasts. Asking changes no result.
class Inquiry {
  public:
    [[nodiscard]] virtual const core::Estimate& estimate() = 0;
    [[nodiscard]] virtual const core::HealthTable& health() const = 0;
    // The newest closing as a curve; false where there was none. Costs some milliseconds while it is judged.
    [[nodiscard]] virtual bool regrowth(core::Regrowth& out) = 0;

  protected:
    ~Inquiry() = default;
};

class Sink {
  public:
    virtual ~Sink() = default;
    // Once, before the first frame; the inquiry is good until the run is gone.
    virtual void on_begin(Inquiry&) {}
    // Every frame that the engine took, before the calls that it gives rise to.
    virtual void on_frame(const Frame&) {}
    virtual void on_estimate(const core::Estimate&) {}
    virtual void on_closure(const core::Closure&) {}
    virtual void on_alarm(const core::Alarm&) {}
    // Once a second of source time, and once before the end.
    virtual void on_health(std::int64_t /*time_ns*/, const core::HealthTable&) {}
    virtual void on_end(const RunEnd&) {}
};

}  // namespace holdfast::outputs
