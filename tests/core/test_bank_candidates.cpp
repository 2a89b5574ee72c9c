// SPDX-License-Identifier: MIT
// The bank's deviations and sums against a filter run for each candidate alone, [bank-deviation].
#include <catch2/catch.hpp>

#include "tests/core/bank_run.hpp"

namespace {

using namespace holdfast::core;
using namespace holdfast::testing;

void check_against_separate_filters(BankRun& run) {
    const ChassisVector scale = chassis_scales();
    double worst = 0.0, worst_residual = 0.0;
    for (const SeparateFilter& s : run.separate()) {
        const ChassisVector x = run.by_bank(s.candidate, s.flap_m2, s.stay_m2);
        for (std::size_t i = 0; i < kChassisCount; ++i) {
            const double off = std::abs(x[i] - s.chassis.filter().x[i]) / scale[i];
            if (!(off <= worst)) worst = off;
        }
        const CandidateSums sums = run.bank().sums(s.candidate);
        const double d = s.flap_m2 - run.bank().flap_prior_mean();
        const double residual2 = sums.residual2 - 2.0 * d * sums.flap_residual + d * d * sums.flap2 -
                                 2.0 * s.stay_m2 * sums.stay_residual + s.stay_m2 * s.stay_m2 * sums.stay2 +
                                 2.0 * d * s.stay_m2 * sums.cross;
        worst_residual = std::max(worst_residual, std::abs(residual2 / s.residual2 - 1.0));
    }
    CHECK(worst < 1e-9);
    CHECK(worst_residual < 1e-9);
}

}  // namespace

TEST_CASE("every candidate of the bank is the filter run for it alone, seed 1") {
    BankRun run(1, {1.0, 0.1}, 0.15);
    for (std::size_t c = 0; c < kCandidateCount; ++c) run.add(c, run.bank().flap_prior_mean(), 0.0);
    run.run(120);
    check_against_separate_filters(run);
}

TEST_CASE("for any size of the flap and any part that stays detached, seeds 2 and 3") {
    const std::uint64_t seed = GENERATE(2, 3);
    INFO("seed " << seed);
    BankRun run(seed, {0.93, 0.2}, 0.0);
    for (std::size_t c = 0; c < kCandidateCount; c += 13) {
        run.add(c, 0.4, 0.0);
        run.add(c, 1.1, 0.3);
        run.add(c, 0.8, 0.8);
    }
    run.run(120);
    check_against_separate_filters(run);
}

TEST_CASE("a candidate's missing share is its shape from its start on, whatever the steps") {
    BankRun run(4, {1.0, 0.1}, 0.0);
    run.run(120);
    const double time_s = 120 * BankRun::kDt_s - 0.5 * BankRun::kDt_s;  // the middle of the newest step
    for (std::size_t shape = 0; shape < kShapeCount; ++shape) {
        for (std::size_t start = 0; start < kStartCount; ++start) {
            for (std::size_t t = 0; t < kTauCount; ++t) {
                const double u = (time_s - run.bank().start_time_s(start)) / run.bank().tau_s(t);
                const double expected = 1.0 - share_back_at(static_cast<Shape>(shape), u);
                const double found = run.bank().missing(candidate_index(shape, start, t));
                // std::abs, not Approx: a million checks would drown the report.
                if (std::abs(found - expected) > 1e-9)
                    FAIL("shape " << shape << " start " << start << " tau " << t << ": " << found << ", not "
                                  << expected);
            }
        }
    }
}

TEST_CASE("candidates start where the flap passes their position, and so many chords later") {
    BankRun run(5, {1.0, 0.1}, 0.0);
    run.run(120);
    for (std::size_t s = 0; s < kStartCount; ++s) {
        const double passed_s = 0.01 + 0.06 * (1.0 - kStartRules[s].position);
        const double start_s = passed_s + kStartRules[s].chords * BankRun::kChordTime_s;
        // Seen at the end of the step in which it passes, and dated to that step's middle.
        CHECK(run.bank().start_time_s(s) == Approx(start_s).margin(1.01 * BankRun::kDt_s));
    }
}

TEST_CASE("an abandoned bank gives the filter its flap back as it was known before") {
    BankRun run(6, {1.0, 0.0}, 0.0);  // no regain: nothing else is changed
    const double mean = run.filter().x[kFlapAreaRear];
    const double variance = run.bank().flap_prior_variance();
    REQUIRE(run.filter().diagonal(kFlapAreaRear) == 0.0);
    run.run(20);
    run.bank().abandon(run.filter());
    CHECK_FALSE(run.bank().running());
    CHECK(run.filter().x[kFlapAreaRear] == Approx(mean));
    CHECK(run.filter().variance(kFlapAreaRear) == Approx(variance));
}
