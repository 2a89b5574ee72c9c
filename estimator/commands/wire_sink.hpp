// SPDX-License-Identifier: MIT
// A run's results onto the link, topic by topic (proto/README.md).
#pragma once

#include <cstdint>
#include <string>
#include <vector>

#include "estimator/link/publisher.hpp"
#include "estimator/outputs/sink.hpp"
#include "proto/codec.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::commands {

class WireSink : public outputs::Sink {
  public:
    // One for each stream: it draws a stream id of its own. The publisher must outlive it.
    WireSink(link::Publisher& publisher, const StreamInfo& stream);

    void on_estimate(const core::Estimate& estimate) override;
    void on_closure(const core::Closure& closure) override;
    void on_alarm(const core::Alarm& alarm) override;
    void on_health(std::int64_t time_ns, const core::HealthTable& health) override;

  private:
    // Each topic counts for itself.
    struct Sequences {
        std::uint64_t estimate = 0;
        std::uint64_t closure = 0;
        std::uint64_t alarm = 0;
        std::uint64_t health = 0;
    };

    link::Publisher& publisher_;
    std::vector<std::string> ride_height_names_;
    std::uint64_t stream_id_;
    Sequences next_;
};

}  // namespace holdfast::commands
