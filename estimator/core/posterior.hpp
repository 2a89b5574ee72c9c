// SPDX-License-Identifier: MIT
// What a bank's sums say: the posterior over candidates, and from it time constant, t95, share missing at an
// instant.
#pragma once

#include <array>
#include <cstddef>

#include "estimator/core/bank.hpp"
#include "estimator/core/usual.hpp"

namespace holdfast::core {

// Posterior by candidate; weights sum to one. Flap size and the part that stays detached are integrated out.
struct CandidateWeights {
    CandidateArray log_weight{};  // not normalised
    CandidateArray weight{};
    CandidateArray flap_mean{};  // m^2
    CandidateArray flap_variance{};
    CandidateArray stay_mean{};           // m^2, mixture of "none stays" and "some stays"
    CandidateArray some_stay_mean{};      // m^2, if some stays
    CandidateArray some_stay_variance{};  // m^4
    CandidateArray stays{};               // probability that a part stays detached, given the candidate
};

// temper >= 1 divides the innovations' information: how much less they tell than white ones would.
void weigh_candidates(const ReattachmentBank& bank, const Usual& usual, double temper, CandidateWeights& out);

// One point of the finely resolved posterior: candidates interpolated in the time constant.
struct PosteriorPoint {
    double weight = 0.0;
    double tau_s = 0.0;
    double start_s = 0.0;  // source time at which reattachment began
    Shape shape = Shape::first_order;
    double flap_m2 = 0.0;
    double flap_variance = 0.0;
    double stay_m2 = 0.0;  // if some stays
    double stay_variance = 0.0;
    double stays = 0.0;  // probability that some stays

    [[nodiscard]] double share_missing(
        double time_s) const;  // of the flap's flow, without the part that stays
};

inline constexpr std::size_t kFine = 4;  // points between two time constants of the grid
inline constexpr std::size_t kFineTauCount = (kTauCount - 1) * kFine + 1;
inline constexpr std::size_t kPointCount = kShapeCount * kStartCount * kFineTauCount;

struct Posterior {
    std::array<PosteriorPoint, kPointCount> points{};
    std::size_t count = 0;
};

void refine(const ReattachmentBank& bank, const CandidateWeights& weights, Posterior& out);

// Quantile of any value of the points: values sorted with their weights. `share` in 0..1.
struct WeightedValues {
    std::array<double, kPointCount> value{};
    std::array<double, kPointCount> weight{};
    std::array<std::size_t, kPointCount> order{};
    std::size_t count = 0;

    void sort();
    [[nodiscard]] double quantile(double share) const;  // after sort()
};

}  // namespace holdfast::core
