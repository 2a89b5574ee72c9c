// SPDX-License-Identifier: MIT
// The closed evidence of a candidate, [bank-evidence], against quadrature: filters run alone at many sizes of
// the flap, their likelihoods weighed by the prior of its size and added up.
#include <catch2/catch.hpp>
#include <numeric>

#include "estimator/core/posterior.hpp"
#include "tests/core/bank_run.hpp"

namespace {

using namespace holdfast::core;
using namespace holdfast::testing;

constexpr int kPoints = 81;
constexpr double kReach = 8.0;  // prior standard deviations to each side

double size_at(const ReattachmentBank& bank, int point) {
    const double z = kReach * (2.0 * point / (kPoints - 1.0) - 1.0);
    return bank.flap_prior_mean() + z * std::sqrt(bank.flap_prior_variance());
}

}  // namespace

TEST_CASE("evidence of a candidate equals quadrature over the flap's size, seed 8") {
    const double temper = GENERATE(1.0, 3.0);
    BankRun run(8, {1.0, 0.1}, 0.0);
    const std::vector<std::size_t> candidates{candidate_index(0, 4, 3), candidate_index(0, 4, 20),
                                              candidate_index(1, 0, 10), candidate_index(2, 8, 25)};
    for (const std::size_t c : candidates)
        for (int i = 0; i < kPoints; ++i) run.add(c, size_at(run.bank(), i), 0.0);
    run.run(60);
    auto weights = std::make_unique<CandidateWeights>();
    const Usual usual;
    weigh_candidates(run.bank(), usual, temper, *weights);
    std::vector<double> quadrature, closed;
    for (std::size_t k = 0; k < candidates.size(); ++k) {
        double sum = 0.0, first = 0.0, mass = 0.0;
        const double most = -0.5 * run.separate()[k * kPoints + kPoints / 2].residual2 / temper;
        for (int i = 0; i < kPoints; ++i) {
            const SeparateFilter& s = run.separate()[k * kPoints + i];
            const double z = kReach * (2.0 * i / (kPoints - 1.0) - 1.0);
            const double prior = std::exp(-0.5 * z * z);
            const double likelihood = std::exp(-0.5 * s.residual2 / temper - most);
            mass += prior;
            sum += prior * likelihood;
            first += prior * likelihood * s.flap_m2;
        }
        quadrature.push_back(most + std::log(sum / mass));
        const std::size_t c = candidates[k];
        const std::size_t group = c / kTauCount;
        const double prior = usual.shape_weight(group / kStartCount) *
                             usual.start_weight(group % kStartCount) *
                             usual.tau_weight(tau_chords(c % kTauCount));
        closed.push_back(weights->log_weight[c] - std::log(prior) + std::log(1.0 - weights->stays[c]));
        if (weights->stays[c] < 1e-6) CHECK(weights->flap_mean[c] == Approx(first / sum).epsilon(1e-5));
    }
    // A constant (normalisation, prior of "the whole flow comes back") is common to all.
    for (std::size_t k = 1; k < candidates.size(); ++k)
        CHECK(closed[k] - closed[0] == Approx(quadrature[k] - quadrature[0]).margin(1e-6));
    REQUIRE(std::abs(quadrature[1] - quadrature[0]) > 0.05);  // the data do tell candidates apart
}

TEST_CASE("weights sum to one, flap sizes and parts that stay keep their bounds, seeds 2 to 4") {
    const std::uint64_t seed = GENERATE(2, 3, 4);
    INFO("seed " << seed);
    BankRun run(seed, {1.0, 0.1}, 0.1);
    auto weights = std::make_unique<CandidateWeights>();
    for (int i = 0; i < 12; ++i) {
        run.run(10);
        weigh_candidates(run.bank(), Usual{}, 1.5, *weights);
        double sum = 0.0, least = 1.0;
        bool bounded = true;
        for (std::size_t c = 0; c < kCandidateCount; ++c) {
            sum += weights->weight[c];
            least = std::min(least, weights->weight[c]);
            bounded = bounded && weights->stays[c] >= 0.0 && weights->stays[c] <= 1.0 &&
                      weights->stay_mean[c] >= 0.0 && weights->stay_mean[c] <= run.bank().flap_prior_mean() &&
                      weights->flap_variance[c] > 0.0;
        }
        CHECK(sum == Approx(1.0).epsilon(1e-12));
        CHECK(least >= 0.0);
        CHECK(bounded);
    }
}

TEST_CASE("before any measurement the weights are the prior's") {
    BankRun run(5, {1.0, 0.1}, 0.0);
    auto weights = std::make_unique<CandidateWeights>();
    const Usual usual;
    weigh_candidates(run.bank(), usual, 1.0, *weights);
    const std::size_t a = candidate_index(0, 2, 8), b = candidate_index(2, 7, 15);
    CHECK(weights->weight[a] / weights->weight[b] ==
          Approx(usual.shape_weight(0) * usual.start_weight(2) * usual.tau_weight(tau_chords(8)) /
                 (usual.shape_weight(2) * usual.start_weight(7) * usual.tau_weight(tau_chords(15)))));
    CHECK(weights->flap_mean[a] == Approx(run.bank().flap_prior_mean()));
}
