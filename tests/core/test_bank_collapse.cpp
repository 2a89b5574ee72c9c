// SPDX-License-Identifier: MIT
// What the bank gives back at its end: mean and covariance of the mixture, against the same written out on
// plain matrices.
#include <catch2/catch.hpp>

#include "tests/core/bank_run.hpp"
#include "tests/dense.hpp"

namespace {

using namespace holdfast::core;
using namespace holdfast::testing;

struct Mixture {
    CandidateArray weight{}, flap_mean{}, flap_variance{}, stay_mean{};
};

// Four candidates far apart.
std::unique_ptr<Mixture> four(double flap_sd) {
    auto m = std::make_unique<Mixture>();
    const auto put = [&](std::size_t c, double weight, double flap, double stay) {
        m->weight[c] = weight;
        m->flap_mean[c] = flap;
        m->flap_variance[c] = flap_sd * flap_sd;
        m->stay_mean[c] = stay;
    };
    put(candidate_index(0, 4, 6), 0.4, 0.80, 0.0);
    put(candidate_index(0, 4, 14), 0.3, 0.95, 0.1);
    put(candidate_index(1, 8, 10), 0.2, 0.70, 0.0);
    put(candidate_index(2, 1, 20), 0.1, 1.10, 0.3);
    return m;
}

struct Moments {
    ChassisVector mean{};
    Matrix<kChassisCount> covariance{};
};

// Sum over candidates of w (P + v s s^T + (x - mean)(x - mean)^T); s: how a candidate's states move with the
// flap's size, by a difference of two sizes.
Moments by_definition(BankRun& run, const Mixture& mixture) {
    Moments out;
    const auto conditional = covariance_of(run.filter());
    for (std::size_t c = 0; c < kCandidateCount; ++c) {
        const auto x = run.by_bank(c, mixture.flap_mean[c], mixture.stay_mean[c]);
        for (std::size_t i = 0; i < kChassisCount; ++i) out.mean[i] += mixture.weight[c] * x[i];
    }
    for (std::size_t c = 0; c < kCandidateCount; ++c) {
        if (mixture.weight[c] == 0.0) continue;
        const auto x = run.by_bank(c, mixture.flap_mean[c], mixture.stay_mean[c]);
        const auto larger = run.by_bank(c, mixture.flap_mean[c] + 1.0, mixture.stay_mean[c]);
        ChassisVector off{}, slope{};
        for (std::size_t i = 0; i < kChassisCount; ++i) {
            off[i] = x[i] - out.mean[i];
            slope[i] = larger[i] - x[i];
        }
        auto p = sum(conditional, outer(slope, slope), mixture.flap_variance[c]);
        p = sum(p, outer(off, off));
        out.covariance = sum(out.covariance, p, mixture.weight[c]);
    }
    return out;
}

double worst_mean(const ChassisVector& found, const ChassisVector& expected) {
    const ChassisVector scale = chassis_scales();
    double worst = 0.0;
    for (std::size_t i = 0; i < kChassisCount; ++i)
        worst = std::max(worst, std::abs(found[i] - expected[i]) / scale[i]);
    return worst;
}

void collapse(BankRun& run, const Mixture& m) {
    run.bank().collapse(run.filter(), m.weight, m.flap_mean, m.flap_variance, m.stay_mean);
}

// No regain: what comes back is then the mixture and nothing else.
BankRun run_of(std::uint64_t seed) {
    BankRun run(seed, {1.0, 0.0}, 0.0);
    run.run(120);
    return run;
}

}  // namespace

TEST_CASE("collapse, sizes known: the mixture's mean and covariance to rounding, seed 1") {
    BankRun run = run_of(1);
    const auto mixture = four(0.0);
    const Moments expected = by_definition(run, *mixture);
    collapse(run, *mixture);
    CHECK(worst_mean(run.filter().x, expected.mean) < 1e-9);
    CHECK(worst_difference(covariance_of(run.filter()), expected.covariance) < 1e-9);
    CHECK_FALSE(run.bank().running());
}

TEST_CASE("collapse onto one candidate: its own filter, its size's uncertainty in it, seed 2") {
    BankRun run = run_of(2);
    auto mixture = std::make_unique<Mixture>();
    const std::size_t c = candidate_index(1, 3, 12);
    mixture->weight[c] = 1.0;
    mixture->flap_mean[c] = 0.9;
    mixture->flap_variance[c] = 0.01;
    const Moments expected = by_definition(run, *mixture);
    collapse(run, *mixture);
    CHECK(worst_mean(run.filter().x, expected.mean) < 1e-9);
    CHECK(worst_difference(covariance_of(run.filter()), expected.covariance) < 1e-9);
}

TEST_CASE(
    "collapse, sizes uncertain: the mean exactly, the covariance with the slopes' mean for each, seed 3") {
    BankRun run = run_of(3);
    const auto mixture = four(0.08);
    const Moments expected = by_definition(run, *mixture);
    collapse(run, *mixture);
    CHECK(worst_mean(run.filter().x, expected.mean) < 1e-9);
    // One slope stands for the candidates' own: second order in their spread.
    CHECK(worst_difference(covariance_of(run.filter()), expected.covariance) < 0.03);
}

TEST_CASE(
    "collapse with a regain: what was learned is shared between the opening's size and the difference") {
    BankRun run(4, {1.1, 0.05}, 0.0);
    const double opened_m2 = run.bank().open_flap_mean();
    const double prior_m2 = run.bank().flap_prior_mean();
    CHECK(prior_m2 == Approx(1.1 * opened_m2));
    run.run(120);
    auto mixture = std::make_unique<Mixture>();
    const std::size_t c = candidate_index(0, 4, 8);
    mixture->weight[c] = 1.0;
    mixture->flap_mean[c] = prior_m2 + 0.1;
    mixture->flap_variance[c] = 1e-4;
    collapse(run, *mixture);
    // Between nothing and all of the surprise.
    CHECK(run.filter().x[kFlapAreaRear] > opened_m2);
    CHECK(run.filter().x[kFlapAreaRear] < opened_m2 + 0.1);
    CHECK(run.filter().variance(kFlapAreaRear) > 0.0);
}
