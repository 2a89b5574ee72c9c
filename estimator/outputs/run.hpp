// SPDX-License-Identifier: MIT
// One outing through the engine. Live and replay are this same object: they differ in where the frames come
// from and in who listens. Everything here goes by the frames' source time; the same frames give the same
// calls.
#pragma once

#include <cstdint>
#include <memory>
#include <vector>

#include "estimator/core/car.hpp"
#include "estimator/core/settings.hpp"
#include "estimator/outputs/sink.hpp"
#include "estimator/outputs/smoothing.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::core {
class Engine;  // its header brings the linear algebra with it
}

namespace holdfast::outputs {

inline constexpr double kDefaultRateHz = 50.0;

// Estimates as they come, each from what was known then; or all at the end, each from the whole outing.
enum class Knowledge : std::uint8_t { of_the_moment, of_the_outing };

class Run : private Inquiry {
  public:
    // Estimates are handed on at `rate_hz`: the first one at or after each multiple of the period. The sinks
    // must outlive the run.
    Run(const core::Car& car, const core::Settings& settings, double rate_hz, std::vector<Sink*> sinks,
        Knowledge knowledge = Knowledge::of_the_moment);

    virtual ~Run();
    Run(const Run&) = delete;
    Run& operator=(const Run&) = delete;

    void step(const Frame& frame);

    // The input has ended. With complete = false, `reason` says in words why it is not whole.
    void finish(bool complete, std::string reason = {});

  private:
    const core::Estimate& estimate() override;
    const core::HealthTable& health() const override;
    bool regrowth(core::Regrowth& out) override;
    void hand_on_events();
    void hand_on_smoothed();
    void hand_on_health(std::int64_t time_ns);

    std::unique_ptr<core::Engine> engine_;  // large: not on the stack
    std::int64_t period_ns_;
    std::vector<Sink*> sinks_;
    Knowledge knowledge_;
    Smoother smoother_;
    std::vector<core::Estimate> held_;  // until the outing is over
    RunEnd end_;
    std::int64_t first_ns_ = 0;
    std::int64_t last_ns_ = 0;
    std::int64_t next_estimate_ns_ = 0;
    std::int64_t next_health_ns_ = 0;
};

}  // namespace holdfast::outputs
