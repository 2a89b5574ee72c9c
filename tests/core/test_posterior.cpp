// SPDX-License-Identifier: MIT
// The finely resolved posterior and its quantiles.
#include <catch2/catch.hpp>
#include <cmath>
#include <random>

#include "estimator/core/posterior.hpp"
#include "tests/core/bank_run.hpp"

namespace {

using namespace holdfast::core;
using namespace holdfast::testing;

// Weights that are normal in ln(time constant) for one shape and start, impossible elsewhere.
std::unique_ptr<CandidateWeights> log_normal(std::size_t shape, std::size_t start, double mean, double sd) {
    auto w = std::make_unique<CandidateWeights>();
    w->log_weight.fill(-1e300);
    for (std::size_t t = 0; t < kTauCount; ++t) {
        const std::size_t c = candidate_index(shape, start, t);
        const double z = (std::log(tau_chords(t)) - mean) / sd;
        w->log_weight[c] = -0.5 * z * z;
        w->flap_mean[c] = 0.5 + 0.01 * static_cast<double>(t);
        w->stays[c] = 0.02;
    }
    return w;
}

}  // namespace

TEST_CASE("refining keeps a log-normal posterior's quantiles and moments") {
    const double sd = GENERATE(0.15, 0.4);
    const double mean = std::log(13.7);
    BankRun run(1, {1.0, 0.1}, 0.0);
    run.run(120);
    const auto weights = log_normal(1, 4, mean, sd);
    auto posterior = std::make_unique<Posterior>();
    refine(run.bank(), *weights, *posterior);
    REQUIRE(posterior->count == kPointCount);
    auto sorted = std::make_unique<WeightedValues>();
    double total = 0.0, first = 0.0, second = 0.0;
    for (std::size_t i = 0; i < posterior->count; ++i) {
        const PosteriorPoint& p = posterior->points[i];
        const double log_tau = std::log(p.tau_s / BankRun::kChordTime_s);
        total += p.weight;
        first += p.weight * log_tau;
        second += p.weight * log_tau * log_tau;
        sorted->value[i] = log_tau;
        sorted->weight[i] = p.weight;
        if (p.weight > 1e-12) {
            CHECK(p.shape == Shape::separation_point);
            CHECK(p.start_s == run.bank().start_time_s(4));
            CHECK(p.stays == Approx(0.02));
        }
    }
    sorted->count = posterior->count;
    sorted->sort();
    CHECK(total == Approx(1.0));
    CHECK(first == Approx(mean).margin(0.01));
    CHECK(std::sqrt(second - first * first) == Approx(sd).epsilon(0.02));
    // Normal quantiles (memory): 1.96 at 97.5 %. Points stand ln(110/3)/100 = 0.036 apart.
    CHECK(sorted->quantile(0.5) == Approx(mean).margin(0.03));
    CHECK(sorted->quantile(0.025) == Approx(mean - 1.96 * sd).margin(0.06));
    CHECK(sorted->quantile(0.975) == Approx(mean + 1.96 * sd).margin(0.06));
}

TEST_CASE("refined points pass through the candidates' own weights") {
    BankRun run(2, {1.0, 0.1}, 0.0);
    run.run(120);
    auto weights = std::make_unique<CandidateWeights>();
    weigh_candidates(run.bank(), Usual{}, 1.0, *weights);
    auto posterior = std::make_unique<Posterior>();
    refine(run.bank(), *weights, *posterior);
    constexpr std::size_t kPerSlice = (kTauCount - 1) * kFine + 1;
    const auto at = [&](std::size_t slice, std::size_t t) {
        return posterior->points[slice * kPerSlice + t * kFine];
    };
    for (const std::size_t slice : {0U, 7U, 15U, 29U}) {
        for (std::size_t t = 0; t < kTauCount; ++t) {
            const double ratio = at(slice, t).weight / at(4, 10).weight;
            CHECK(ratio ==
                  Approx(weights->weight[slice * kTauCount + t] / weights->weight[4 * kTauCount + 10])
                      .margin(1e-9));
            CHECK(at(slice, t).tau_s == Approx(run.bank().tau_s(t)));
            CHECK(at(slice, t).flap_m2 == Approx(weights->flap_mean[slice * kTauCount + t]));
        }
    }
}

TEST_CASE("share missing of a point: all before its start, its shape after") {
    PosteriorPoint p;
    p.tau_s = 0.05;
    p.start_s = 10.0;
    p.shape = Shape::slow_tail;
    CHECK(p.share_missing(9.9) == 1.0);
    CHECK(p.share_missing(10.0) == 1.0);
    CHECK(p.share_missing(10.1) == Approx(1.0 - share_back_at(Shape::slow_tail, 2.0)));
    p.start_s = std::numeric_limits<double>::quiet_NaN();  // its start has not come
    CHECK(p.share_missing(1e6) == 1.0);
}

TEST_CASE("weighted quantiles against counting, seeds 1 to 5") {
    const std::uint64_t seed = GENERATE(1, 2, 3, 4, 5);
    INFO("seed " << seed);
    std::mt19937_64 random(seed);
    std::uniform_int_distribution<int> times(0, 4);
    std::normal_distribution<double> normal;
    auto values = std::make_unique<WeightedValues>();
    std::vector<double> written_out;  // every value as often as its weight says
    values->count = 200;
    for (std::size_t i = 0; i < values->count; ++i) {
        values->value[i] = std::round(4.0 * normal(random)) / 4.0;  // some are equal
        const int n = times(random);
        values->weight[i] = n;
        written_out.insert(written_out.end(), static_cast<std::size_t>(n), values->value[i]);
    }
    values->sort();
    std::sort(written_out.begin(), written_out.end());
    const auto n = static_cast<double>(written_out.size());
    for (const double share : {0.0101, 0.25, 0.4999, 0.7, 0.975}) {
        const auto k = static_cast<std::size_t>(std::ceil(share * n)) - 1;
        CHECK(values->quantile(share) == written_out[k]);
    }
}
