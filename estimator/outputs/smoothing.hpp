// SPDX-License-Identifier: MIT
// After the outing: each estimate with the whole outing's knowledge. The slow states are smoothed backwards
// over the engine's snapshots (Rauch, Tung & Striebel, AIAA Journal 3, 1965) and the areas moved by what
// their states moved.
#pragma once

#include <vector>

#include "estimator/core/results.hpp"
#include "estimator/core/slow_snapshot.hpp"

namespace holdfast::outputs {

class Smoother {
  public:
    void add(const core::SlowSnapshot& snapshot) { snapshots_.push_back(snapshot); }
    // Once, when all are in.
    void solve();
    // Areas and downforces of an estimate, moved to the smoothed states; the rest stays.
    void apply(core::Estimate& estimate) const;

    struct State {
        std::array<double, core::kSlowCount> change{};  // smoothed less filtered
        std::array<double, core::kSlowCount> mean{};    // smoothed
        std::array<double, core::kSlowCount * core::kSlowCount> covariance{};
    };
    [[nodiscard]] const std::vector<State>& states() const { return states_; }

  private:
    std::vector<core::SlowSnapshot> snapshots_;
    std::vector<State> states_;  // one for each snapshot
};

}  // namespace holdfast::outputs
