// SPDX-License-Identifier: MIT
// Coverage by simulation: closings drawn from the bank's own prior, their measurements from its own model.
// The posterior then has to hold the truth as often as it says, whatever the data tell: a Bayesian interval
// is exact under its own prior. What remains is the mathematics of the bank.
#include <catch2/catch.hpp>
#include <numeric>

#include "estimator/core/posterior.hpp"
#include "tests/core/bank_run.hpp"

namespace {

using namespace holdfast::core;
using namespace holdfast::testing;

constexpr int kClosings = 300;

CandidateArray prior_of(const Usual& usual) {
    CandidateArray prior{};
    for (std::size_t c = 0; c < kCandidateCount; ++c) {
        const std::size_t group = c / kTauCount;
        prior[c] = usual.shape_weight(group / kStartCount) * usual.start_weight(group % kStartCount) *
                   usual.tau_weight(tau_chords(c % kTauCount));
    }
    return prior;
}

}  // namespace

TEST_CASE("300 closings drawn from the prior: the posterior holds them as often as it says, seeds 1 to 300") {
    const Usual usual;
    const CandidateArray prior = prior_of(usual);
    std::mt19937_64 random(1);
    std::discrete_distribution<std::size_t> candidate(prior.begin(), prior.end());
    std::uniform_real_distribution<double> uniform;
    std::normal_distribution<double> normal;
    auto weights = std::make_unique<CandidateWeights>();
    double inner = 0.0, outer = 0.0, rank_sum = 0.0, flap_z2 = 0.0, told = 0.0;
    for (int closing = 1; closing <= kClosings; ++closing) {
        BankRun run(static_cast<std::uint64_t>(closing), {1.0, 0.1}, 0.0);
        const std::size_t truth = candidate(random);
        const double flap_m2 =
            run.bank().flap_prior_mean() + std::sqrt(run.bank().flap_prior_variance()) * normal(random);
        run.add(truth, flap_m2, 0.0);
        run.measure_the_first();
        run.run(100);
        weigh_candidates(run.bank(), usual, 1.0, *weights);
        // Where the true time constant lies in the posterior: uniform, its own step of the grid drawn within.
        double below = 0.0, at = 0.0, flap = 0.0, flap2 = 0.0;
        for (std::size_t c = 0; c < kCandidateCount; ++c) {
            const double w = weights->weight[c];
            if (c % kTauCount < truth % kTauCount) below += w;
            if (c % kTauCount == truth % kTauCount) at += w;
            flap += w * weights->flap_mean[c];
            flap2 += w * (weights->flap_variance[c] + weights->flap_mean[c] * weights->flap_mean[c]);
        }
        const double rank = below + at * uniform(random);
        rank_sum += rank;
        inner += std::abs(rank - 0.5) < 0.25 ? 1.0 : 0.0;
        outer += std::abs(rank - 0.5) < 0.475 ? 1.0 : 0.0;
        flap_z2 += (flap_m2 - flap) * (flap_m2 - flap) / (flap2 - flap * flap);
        told += at;
    }
    INFO("50 % interval holds " << inner << ", 95 % interval " << outer << " of " << kClosings
                                << "; mean rank " << rank_sum / kClosings << ", flap's size z^2 "
                                << flap_z2 / kClosings << ", mean weight of the true time constant "
                                << told / kClosings);
    // Three standard deviations of the binomial, of the mean of uniform ranks, of a mean of squares.
    CHECK(inner == Approx(0.50 * kClosings).margin(26.0));
    CHECK(outer == Approx(0.95 * kClosings).margin(11.4));
    CHECK(rank_sum / kClosings == Approx(0.5).margin(0.05));
    CHECK(flap_z2 / kClosings == Approx(1.0).margin(0.25));
    CHECK(told / kClosings > 2.0 / static_cast<double>(kTauCount));  // the data did say something
}
