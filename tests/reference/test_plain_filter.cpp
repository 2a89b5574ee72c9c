// SPDX-License-Identifier: MIT
// The factored filter against a plain one in long double with Joseph's update, on random linear systems in
// the form the project uses: some states move, the rest bias them and stay (the bias partition).
#include <catch2/catch.hpp>
#include <random>

#include "tests/dense.hpp"
#include "tests/random_filter.hpp"
#include "tests/reference/moving_system.hpp"

namespace {

using namespace holdfast::testing;
using holdfast::core::UdFilter;

template <std::size_t N>
struct PlainFilter {
    std::array<long double, N> x{};
    Matrix<N> p{};

    void predict(const Matrix<N>& f, const Matrix<N>& q) {
        std::array<long double, N> moved{};
        for (std::size_t i = 0; i < N; ++i)
            for (std::size_t j = 0; j < N; ++j) moved[i] += f[i][j] * x[j];
        x = moved;
        p = sum(sandwich(f, p), q);
    }
    // Joseph: P = (I - K h^T) P (I - K h^T)^T + K R K^T. Returns the innovation's variance.
    long double update(const std::array<double, N>& h, long double noise, long double innovation) {
        std::array<long double, N> gain{};
        long double s = noise;
        for (std::size_t i = 0; i < N; ++i)
            for (std::size_t j = 0; j < N; ++j) gain[i] += p[i][j] * static_cast<long double>(h[j]);
        for (std::size_t i = 0; i < N; ++i) s += static_cast<long double>(h[i]) * gain[i];
        for (long double& k : gain) k /= s;
        const Matrix<N> keep = sum(identity<N>(), outer(gain, h), -1.0L);
        p = sum(sandwich(keep, p), outer(gain, gain), noise);
        for (std::size_t i = 0; i < N; ++i) x[i] += gain[i] * innovation;
        return s;
    }
};

template <std::size_t N, std::size_t M, std::size_t Q>
MovingSystem<N, M, Q> random_system(std::mt19937_64& random) {
    std::normal_distribution<double> normal;
    MovingSystem<N, M, Q> s;
    for (std::size_t i = 0; i < M; ++i) {
        for (std::size_t j = 0; j < N; ++j) s.f[i][j] = 0.3 * normal(random) / std::sqrt(double(N));
        s.f[i][i] += 0.7L;
        for (std::size_t k = 0; k < Q; ++k) s.input[i][k] = normal(random);
    }
    for (double& q : s.q) q = 0.05 + std::abs(normal(random));
    return s;
}

struct Worst {
    double covariance = 0.0, state = 0.0, innovation_variance = 0.0;
};

template <class Real, std::size_t N, std::size_t M, std::size_t Q>
Worst run(std::uint64_t seed, int steps) {
    std::mt19937_64 random(seed);
    std::normal_distribution<double> normal;
    auto filter = random_filter<Real, N>(random, 1.0);
    PlainFilter<N> plain;
    plain.p = covariance_of(filter);
    for (std::size_t i = 0; i < N; ++i) plain.x[i] = filter.x[i];
    const auto system = random_system<N, M, Q>(random);
    Matrix<N> noise{};
    for (std::size_t i = 0; i < M; ++i)
        for (std::size_t j = 0; j < M; ++j)
            for (std::size_t k = 0; k < Q; ++k)
                noise[i][j] += system.input[i][k] * system.input[j][k] * system.q[k];
    Worst worst;
    for (int step = 0; step < steps; ++step) {
        predict(filter, system);
        plain.predict(system.f, noise);
        for (int measurement = 0; measurement < 2; ++measurement) {
            std::array<double, N> h{};
            typename UdFilter<Real, N>::Vector h_real{};
            for (std::size_t i = 0; i < N; ++i) h_real[i] = static_cast<Real>(h[i] = normal(random));
            const double measured = 3.0 * normal(random);
            double predicted_real = 0.0;
            long double predicted = 0.0L;
            for (std::size_t i = 0; i < N; ++i) {
                predicted_real += h[i] * static_cast<double>(filter.x[i]);
                predicted += static_cast<long double>(h[i]) * plain.x[i];
            }
            const double s_real = filter.expect(h_real, static_cast<Real>(0.5));
            filter.apply(static_cast<Real>(measured - predicted_real));
            const long double s = plain.update(h, 0.5L, measured - predicted);
            worst.innovation_variance =
                std::max(worst.innovation_variance, std::abs(s_real / static_cast<double>(s) - 1.0));
        }
        worst.covariance = std::max(worst.covariance, worst_difference(covariance_of(filter), plain.p));
        for (std::size_t i = 0; i < N; ++i) {
            const auto off =
                static_cast<double>(std::abs(filter.x[i] - plain.x[i]) / std::sqrt(plain.p[i][i]));
            worst.state = std::max(worst.state, off);
        }
    }
    return worst;
}

// Bounds: a few hundred roundings of the type's own size, states counted in standard deviations.
template <class Real, std::size_t N, std::size_t M, std::size_t Q>
void agrees() {
    constexpr double kBound = sizeof(Real) == 4 ? 2e-3 : 5e-12;
    for (const std::uint64_t seed : {1, 2, 3, 4, 5}) {
        const Worst worst = run<Real, N, M, Q>(seed, 300);
        INFO("seed " << seed << ": covariance " << worst.covariance << ", state " << worst.state
                     << ", innovation variance " << worst.innovation_variance);
        CHECK(worst.covariance < kBound);
        CHECK(worst.state < kBound);
        CHECK(worst.innovation_variance < kBound);
    }
}

}  // namespace

TEMPLATE_TEST_CASE("factored filter equals the plain filter, seeds 1 to 5, 300 steps", "", double, float) {
    SECTION("8 states, 3 moving") {
        agrees<TestType, 8, 3, 2>();
    }
    SECTION("12 states, 6 moving") {
        agrees<TestType, 12, 6, 4>();
    }
    SECTION("16 states, 6 moving") {
        agrees<TestType, 16, 6, 4>();
    }
    SECTION("10 states, all moving") {
        agrees<TestType, 10, 10, 3>();
    }
}
