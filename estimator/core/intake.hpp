// SPDX-License-Identifier: MIT
// The door: every sample of every channel passes here first. Counts gaps, repeats, non-finite and impossible
// values, learns each channel's rate and noise, and notices a channel that is stuck or gone. What does not
// pass is not fused.
#pragma once

#include <array>
#include <cstdint>

#include "estimator/core/results.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::core {

class Intake {
  public:
    // Samples of the frame that may be fused; the frame's time is later than the one before.
    [[nodiscard]] std::uint64_t admit(const Frame& frame);
    void count_repeats(const Frame& frame);
    // A channel that has not come for too long is gone.
    void expire(std::int64_t now_ns);

    [[nodiscard]] const HealthTable& health() const { return health_; }
    [[nodiscard]] HealthTable& health() { return health_; }
    // White noise of a channel from second differences, standard deviation in SI; 0 until known.
    [[nodiscard]] double noise_sd(Channel c) const { return learned_[index(c)].noise_sd; }
    // Time since the last good sample, s; infinite where there was none.
    [[nodiscard]] double age_s(Channel c, std::int64_t now_ns) const;

  private:
    struct Learned {
        double before = 0.0, before_that = 0.0;  // two samples back, for second differences
        std::uint64_t in_a_row = 0;              // samples without a gap, for the same
        double noise_sd = 0.0;
        double moving_share = 0.0;  // share of samples that differ from the one before
        std::uint64_t same_in_a_row = 0;
        std::int64_t same_since_ns = 0;
        std::uint64_t moving_again = 0;
        bool suspect = false;  // the newest sample stood far from the one before
        double suspect_value = 0.0;
        double spikes = 0.0;  // of late, forgotten over kSpikeMemory_s
    };
    [[nodiscard]] bool is_spike(Channel c, Learned& learned, ChannelHealth& health, double value,
                                double since_s);
    [[nodiscard]] bool admit(Channel c, std::int64_t time_ns, double value);
    void learn(Channel c, Learned& learned, ChannelHealth& health, std::int64_t time_ns, double value);

    HealthTable health_{};
    std::array<Learned, kChannelCount> learned_{};
};

}  // namespace holdfast::core
