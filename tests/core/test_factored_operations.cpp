// SPDX-License-Identifier: MIT
// The factored covariance's own operations against the same written out on plain matrices.
#include <catch2/catch.hpp>
#include <random>

#include "tests/dense.hpp"
#include "tests/random_filter.hpp"

namespace {

using namespace holdfast::testing;
using holdfast::core::UdFilter;

constexpr std::size_t kN = 9;
constexpr double kRounding = 1e-12;

UdFilter<double, kN>::Vector random_vector(std::mt19937_64& random, std::size_t last = kN - 1) {
    std::normal_distribution<double> normal;
    UdFilter<double, kN>::Vector a{};
    for (std::size_t i = 0; i <= last; ++i) a[i] = normal(random);
    return a;
}

}  // namespace

TEST_CASE("rank-one change adds weight a a^T, seeds 1 to 20") {
    const std::uint64_t seed = GENERATE(range(1, 21));
    INFO("seed " << seed);
    std::mt19937_64 random(seed);
    auto filter = random_filter<double, kN>(random, 2.0);
    const std::size_t last = seed % kN;
    const auto a = random_vector(random, last);
    const auto expected = sum(covariance_of(filter), outer(a, a), 0.7L);
    filter.add_rank_one(a, 0.7, last);
    CHECK(worst_difference(covariance_of(filter), expected) < kRounding);
}

TEST_CASE("rank-one change onto a covariance of nothing, and of weight nothing") {
    std::mt19937_64 random(1);
    UdFilter<double, kN> filter;
    filter.set_diagonal({});
    const auto a = random_vector(random), b = random_vector(random);
    filter.add_rank_one(a, 0.0);
    CHECK(worst_difference(covariance_of(filter), Matrix<kN>{}) == 0.0);
    filter.add_rank_one(a, 2.0);
    filter.add_rank_one(b, 0.5);
    CHECK(worst_difference(covariance_of(filter), sum(outer(a, a), sum(outer(a, a), outer(b, b), 0.5L))) <
          kRounding);
}

TEST_CASE("resetting a state leaves the others' covariance as it was, every state") {
    const std::size_t state = GENERATE(range<std::size_t>(0, kN));
    std::mt19937_64 random(100 + state);
    INFO("seed " << 100 + state);
    auto filter = random_filter<double, kN>(random, 2.0);
    auto expected = covariance_of(filter);
    for (std::size_t k = 0; k < kN; ++k) expected[state][k] = expected[k][state] = 0.0L;
    expected[state][state] = 3.0L;
    filter.reset_state(state, 3.0);
    CHECK(worst_difference(covariance_of(filter), expected) < kRounding);
}

TEST_CASE("scaling a state scales its row and its column, every state") {
    const std::size_t state = GENERATE(range<std::size_t>(0, kN));
    std::mt19937_64 random(200 + state);
    INFO("seed " << 200 + state);
    auto filter = random_filter<double, kN>(random, 2.0);
    auto expected = covariance_of(filter);
    for (std::size_t k = 0; k < kN; ++k) expected[state][k] *= 0.3L;
    for (std::size_t k = 0; k < kN; ++k) expected[k][state] *= 0.3L;
    filter.scale_state(state, 0.3);
    CHECK(worst_difference(covariance_of(filter), expected) < kRounding);
}

TEST_CASE("variance of a linear form is a^T P a, expected innovation variance h^T P h + R, seed 5") {
    std::mt19937_64 random(5);
    auto filter = random_filter<double, kN>(random, 2.0);
    const auto p = covariance_of(filter);
    const auto a = random_vector(random);
    long double expected = 0.0L;
    for (std::size_t i = 0; i < kN; ++i)
        for (std::size_t j = 0; j < kN; ++j) expected += a[i] * p[i][j] * a[j];
    CHECK(filter.variance_of(a) == Approx(static_cast<double>(expected)).epsilon(kRounding));
    CHECK(filter.expect(a, 0.25) == Approx(static_cast<double>(expected) + 0.25).epsilon(kRounding));
}

TEST_CASE("a state with no variance is left alone by an update and takes noise afterwards, seed 6") {
    std::mt19937_64 random(6);
    auto filter = random_filter<double, kN>(random, 1.0);
    filter.reset_state(4, 0.0);
    const double before = filter.x[4];
    (void)filter.expect(random_vector(random), 0.5);
    filter.apply(2.0);
    CHECK(filter.x[4] == before);
    CHECK(filter.variance(4) == 0.0);
    filter.add_noise(4, 0.25);
    CHECK(filter.variance(4) == Approx(0.25).epsilon(kRounding));
}

TEST_CASE("no variance turns negative under a hundred thousand sharp updates in 32-bit float, seed 7") {
    std::mt19937_64 random(7);
    std::normal_distribution<float> normal;
    auto filter = random_filter<float, 6>(random, 4.0);
    bool sound = true;
    for (int i = 0; i < 100000; ++i) {
        UdFilter<float, 6>::Vector h;
        for (float& v : h) v = normal(random);
        (void)filter.expect(h, 1e-9F);
        filter.apply(normal(random));
        if (i % 7 == 0) filter.add_noise(static_cast<std::size_t>(i) % 6, 1e-6F);
        for (std::size_t j = 0; j < 6; ++j)
            sound = sound && filter.diagonal(j) >= 0.0F && std::isfinite(filter.x[j]);
    }
    CHECK(sound);
}
