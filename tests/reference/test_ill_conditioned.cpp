// SPDX-License-Identifier: MIT
// Bierman's ill-conditioned pair (Factorization Methods for Discrete Sequential Estimation, 1977): a wide
// prior I / e^2 and two measurements that differ by e. The textbook update loses the sign of a variance, the
// factored one does not.
#include <catch2/catch.hpp>

#include "estimator/core/ud_filter.hpp"

namespace {

using holdfast::core::UdFilter;

constexpr float kE = 1e-4F;
using Vector = std::array<float, 2>;

// P -= K h^T P, as textbooks write it.
void plain_update(std::array<Vector, 2>& p, const Vector& h) {
    const Vector ph{p[0][0] * h[0] + p[0][1] * h[1], p[1][0] * h[0] + p[1][1] * h[1]};
    const float s = h[0] * ph[0] + h[1] * ph[1] + 1.0F;
    for (std::size_t i = 0; i < 2; ++i)
        for (std::size_t j = 0; j < 2; ++j) p[i][j] -= ph[i] / s * ph[j];
}

}  // namespace

TEST_CASE("ill-conditioned pair in 32-bit float: the plain update's variance turns negative") {
    std::array<Vector, 2> p{Vector{1.0F / (kE * kE), 0.0F}, Vector{0.0F, 1.0F / (kE * kE)}};
    plain_update(p, {1.0F, kE});
    plain_update(p, {1.0F, 1.0F});
    CHECK(p[0][0] < 0.0F);
}

TEST_CASE("ill-conditioned pair in 32-bit float: the factored update gives the exact covariance") {
    UdFilter<float, 2> filter;
    filter.set_diagonal({1.0F / (kE * kE), 1.0F / (kE * kE)});
    for (const Vector& h : {Vector{1.0F, kE}, Vector{1.0F, 1.0F}}) {
        (void)filter.expect(h, 1.0F);
        filter.apply(0.0F);
    }
    const double e = kE;
    const double determinant = 1.0 - 2.0 * e + 4.0 * e * e + 2.0 * e * e * e * e;
    CHECK(filter.variance(0) == Approx((1.0 + 2.0 * e * e) / determinant).epsilon(1e-6));
    CHECK(filter.covariance(0, 1) == Approx(-(1.0 + e) / determinant).epsilon(1e-6));
    CHECK(filter.variance(1) == Approx((2.0 + e * e) / determinant).epsilon(1e-6));
    CHECK(filter.variance(0) == Approx(1.00020002).epsilon(1e-6));
    CHECK(filter.covariance(0, 1) == Approx(-1.00030002).epsilon(1e-6));
    CHECK(filter.variance(1) == Approx(2.00040001).epsilon(1e-6));
}

TEST_CASE("ill-conditioned pair in 64-bit float, a thousand times worse conditioned") {
    const double e = 1e-7;
    UdFilter<double, 2> filter;
    filter.set_diagonal({1.0 / (e * e), 1.0 / (e * e)});
    (void)filter.expect({1.0, e}, 1.0);
    filter.apply(0.0);
    (void)filter.expect({1.0, 1.0}, 1.0);
    filter.apply(0.0);
    const double determinant = 1.0 - 2.0 * e + 4.0 * e * e;
    CHECK(filter.variance(0) == Approx(1.0 / determinant).epsilon(1e-9));
    CHECK(filter.covariance(0, 1) == Approx(-(1.0 + e) / determinant).epsilon(1e-9));
    CHECK(filter.variance(1) == Approx(2.0 / determinant).epsilon(1e-9));
}
