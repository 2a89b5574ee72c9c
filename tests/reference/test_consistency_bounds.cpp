// SPDX-License-Identifier: MIT
// A filter whose model is true has errors of the size it states: chi-square bounds on the normalised squares
// of its errors and innovations (Bar-Shalom, Li & Kirubarajan, Estimation with Applications to Tracking and
// Navigation, 2001, ch. 5).
#include <catch2/catch.hpp>
#include <random>

#include "estimator/core/ud_filter.hpp"

namespace {

using holdfast::core::UdFilter;

struct Squares {
    double error = 0.0;       // e^T P^-1 e, two states
    double innovation = 0.0;  // r^2 / S
};

constexpr int kSteps = 100;
constexpr double kDt = 0.5, kAccelSd = 0.8, kNoiseSd = 2.0;

// Position and rate under white acceleration; the truth drawn from the filter's own prior.
std::array<Squares, kSteps> run(std::mt19937_64& random, double believed_accel_sd) {
    std::normal_distribution<double> normal;
    UdFilter<double, 2> filter;
    filter.set_diagonal({25.0, 4.0});
    double position = 5.0 * normal(random), rate = 2.0 * normal(random);
    std::array<Squares, kSteps> out{};
    for (Squares& squares : out) {
        const double accel = kAccelSd * normal(random);
        position += kDt * rate + 0.5 * kDt * kDt * accel;
        rate += kDt * accel;
        filter.x[0] += kDt * filter.x[1];
        const double u = filter.column(1)[0];
        std::array<std::array<double, 3>, 2> rows{{{1.0, u + kDt, 0.5 * kDt * kDt}, {0.0, 1.0, kDt}}};
        filter.triangularize<2, 1>(rows, {believed_accel_sd * believed_accel_sd});
        const double innovation = position + kNoiseSd * normal(random) - filter.x[0];
        const double variance = filter.expect({1.0, 0.0}, kNoiseSd * kNoiseSd);
        filter.apply(innovation);
        const double e0 = position - filter.x[0], e1 = rate - filter.x[1];
        const double p00 = filter.variance(0), p01 = filter.covariance(0, 1), p11 = filter.variance(1);
        squares.error = (p11 * e0 * e0 - 2.0 * p01 * e0 * e1 + p00 * e1 * e1) / (p00 * p11 - p01 * p01);
        squares.innovation = innovation * innovation / variance;
    }
    return out;
}

struct Share {
    double errors_within = 0.0;       // of the steps whose mean over the runs lies within its 95 % bounds
    double innovations_within = 0.0;  // of single innovations below their 95 % bound
};

Share within_bounds(std::uint64_t seed, double believed_accel_sd) {
    constexpr int kRuns = 50;
    constexpr double kLow = 1.4844, kHigh = 2.5912;  // mean of 50, 2 degrees of freedom, 95 % (the book)
    constexpr double kOne = 3.8415;                  // 1 degree of freedom, 95 % (chi-square)
    std::mt19937_64 random(seed);
    std::array<double, kSteps> mean{};
    Share share;
    for (int i = 0; i < kRuns; ++i) {
        const auto squares = run(random, believed_accel_sd);
        for (int step = 0; step < kSteps; ++step) {
            mean[step] += squares[step].error / kRuns;
            share.innovations_within += (squares[step].innovation < kOne ? 1.0 : 0.0) / (kRuns * kSteps);
        }
    }
    for (const double m : mean) share.errors_within += (m > kLow && m < kHigh ? 1.0 : 0.0) / kSteps;
    return share;
}

}  // namespace

TEST_CASE("a true model keeps the chi-square bounds in about 95 % of the steps, seeds 1 to 4") {
    const std::uint64_t seed = GENERATE(1, 2, 3, 4);
    INFO("seed " << seed);
    const Share share = within_bounds(seed, kAccelSd);
    CHECK(share.errors_within > 0.85);  // neighbouring steps share their errors: some 20 independent ones
    CHECK(share.innovations_within > 0.94);  // 5000 independent ones: 0.95 with a standard deviation of 0.003
    CHECK(share.innovations_within < 0.96);
}

TEST_CASE("a model that believes in too little process noise breaks the bounds, seed 1") {
    const Share share = within_bounds(1, 0.4 * kAccelSd);
    CHECK(share.errors_within < 0.3);
    CHECK(share.innovations_within < 0.93);
}
