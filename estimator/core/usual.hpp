// SPDX-License-Identifier: MIT
// The car's own usual reattachment, learned over the outing: how many chords until 95 % is back, where in the
// flap's travel it starts and which shape it has. A closing is judged against what the earlier ones taught.
#pragma once

#include <array>
#include <cstddef>

#include "estimator/core/bank.hpp"

namespace holdfast::core {

// A number known as its natural logarithm with a normal uncertainty.
struct LogNormal {
    double log_mean = 0.0;
    double log_sd = 1.0;
};

class Usual {
  public:
    static constexpr std::size_t kCapacity = 256;  // closings remembered; the oldest are overwritten

    // One judged closing: ln of t95 in chords with its standard deviation, and the posterior shares of starts
    // and shapes.
    void learn(double log_chords, double log_sd, const std::array<double, kStartCount>& start_share,
               const std::array<double, kShapeCount>& shape_share);

    // The flap's size that came back over the one that the opening took away, with its standard deviation.
    void learn_regain(double ratio, double ratio_sd);
    [[nodiscard]] Regain regain() const;

    // The usual t95 in chords, some closings being slow ones that must not pull it.
    [[nodiscard]] LogNormal t95_chords() const { return t95_; }
    [[nodiscard]] std::size_t count() const { return count_; }
    // Prior weight of a candidate, not normalised.
    [[nodiscard]] double start_weight(std::size_t start) const { return start_weight_[start]; }
    [[nodiscard]] double shape_weight(std::size_t shape) const { return shape_weight_[shape]; }
    [[nodiscard]] double tau_weight(double tau_in_chords) const;

  private:
    void locate();

    std::array<double, kCapacity> log_chords_{};
    std::array<double, kCapacity> log_sd_{};
    std::size_t count_ = 0;
    LogNormal t95_{3.6, 0.40};  // 37 chords: a time constant of 10 to 16 and the part before the flap is shut
    double regain_ = 1.0;
    double regain_variance_ = 0.01;  // 10 %
    std::array<double, kStartCount> start_weight_{1, 1, 1, 1, 1, 1, 1, 1, 1, 1};
    std::array<double, kShapeCount> shape_weight_{1.0, 1.0, 1.0};
};

}  // namespace holdfast::core
