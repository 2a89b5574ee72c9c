// SPDX-License-Identifier: MIT
// A relation between channels that a sound car keeps: y = x^T theta, theta learned with a long memory. Its
// residual, over a tenth of a second and over a second, beside what it usually is, tells whether the channels
// still agree.
#pragma once

#include <algorithm>
#include <array>
#include <cmath>
#include <cstddef>

#include "estimator/core/ud_filter.hpp"

namespace holdfast::core {

struct RelationLimits {
    double noise_sd = 1.0;    // of one value of y against the relation, as far as it is white
    double fast_least = 1.0;  // residual over 0.1 s below which nothing is said, in y's unit
    double slow_least = 1.0;  // over 1 s
};

template <std::size_t N>
class Relation {
  public:
    using Filter = UdFilter<double, N>;
    using Vector = typename Filter::Vector;

    // Prior of theta; last entry is the offset, which is let to drift over kMemory_s.
    Relation(const Vector& mean, const Vector& sd, const RelationLimits& limits) : limits_(limits) {
        Vector variance{};
        for (std::size_t i = 0; i < N; ++i) variance[i] = sd[i] * sd[i];
        filter_.set_diagonal(variance);
        filter_.x = mean;
    }

    void observe(const Vector& x, double y, double dt_s, bool learn) {
        const double residual = y - predict(x);
        fast_ += std::min(dt_s / kFast_s, 1.0) * (residual - fast_);
        slow_ += std::min(dt_s / kSlow_s, 1.0) * (residual - slow_);
        const bool calm =
            (std::abs(fast_) < fast_gate() && std::abs(slow_) < kSlowCalm * slow_gate()) || !known();
        if (!learn || !calm) return;
        learned_s_ += dt_s;
        const double share = std::min(dt_s / kNoiseMemory_s, 1.0) + (learned_s_ < 5.0 ? dt_s / 5.0 : 0.0);
        fast_level_ += share * (std::abs(fast_) - fast_level_);
        slow_level_ += share * (std::abs(slow_) - slow_level_);
        const double rate = dt_s / kMemory_s;
        filter_.add_noise(N - 1, rate * rate * limits_.noise_sd * limits_.noise_sd);
        (void)filter_.expect(x, limits_.noise_sd * limits_.noise_sd);
        filter_.apply(residual);
    }

    [[nodiscard]] double predict(const Vector& x) const {
        double sum = 0.0;
        for (std::size_t i = 0; i < N; ++i) sum += filter_.x[i] * x[i];
        return sum;
    }
    [[nodiscard]] bool known() const { return learned_s_ >= kLearnFirst_s; }
    [[nodiscard]] double fast() const { return fast_; }
    [[nodiscard]] double slow() const { return slow_; }
    // Mean size of the 0.1 s residual on a sound car.
    [[nodiscard]] double level() const { return std::max(fast_level_, 0.25 * limits_.fast_least); }
    [[nodiscard]] bool fast_broken() const { return known() && std::abs(fast_) > fast_gate(); }
    [[nodiscard]] bool slow_broken() const { return known() && std::abs(slow_) > slow_gate(); }
    [[nodiscard]] bool restored() const {
        return std::abs(fast_) < 0.5 * fast_gate() && std::abs(slow_) < 0.5 * slow_gate();
    }
    // How far beyond its gate the relation is: 1 at the gate.
    [[nodiscard]] double strain() const {
        return std::max(std::abs(fast_) / fast_gate(), std::abs(slow_) / slow_gate());
    }
    [[nodiscard]] const Filter& filter() const { return filter_; }

  private:
    static constexpr double kFast_s = 0.1, kSlow_s = 1.0;
    static constexpr double kMemory_s = 100.0;  // of the offset
    static constexpr double kNoiseMemory_s = 40.0;
    static constexpr double kLearnFirst_s = 25.0;
    static constexpr double kSlowCalm = 0.6;  // nearer to the gate than this, nothing is learned any more
    static constexpr double kLevels = 7.0;    // mean sizes of a residual that make a gate

    // A rough car is let to be rougher, within bounds: a drift must not widen the gate that is to find it.
    [[nodiscard]] double fast_gate() const {
        return std::clamp(kLevels * fast_level_, limits_.fast_least, 2.5 * limits_.fast_least);
    }
    [[nodiscard]] double slow_gate() const {
        return std::clamp(kLevels * slow_level_, limits_.slow_least, 1.5 * limits_.slow_least);
    }

    RelationLimits limits_;
    Filter filter_;
    double fast_ = 0.0, slow_ = 0.0;
    double fast_level_ = 0.0, slow_level_ = 0.0;
    double learned_s_ = 0.0;
};

}  // namespace holdfast::core
