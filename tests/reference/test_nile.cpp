// SPDX-License-Identifier: MIT
// The factored filter as a linear filter on the best-known series there is. Values marked "computed":
// statsmodels 0.13.5 (exact diffuse initialisation) and the closed forms; "book": Durbin & Koopman.
#include <catch2/catch.hpp>
#include <cmath>
#include <numbers>

#include "estimator/core/ud_filter.hpp"
#include "tests/reference/nile.hpp"

namespace {

using namespace holdfast::testing;
using holdfast::core::UdFilter;

// One term of the log-likelihood, and the update.
template <class Real, std::size_t N>
double take(UdFilter<Real, N>& filter, double measured) {
    typename UdFilter<Real, N>::Vector h{};
    h[0] = 1;
    const double variance = filter.expect(h, static_cast<Real>(kNileNoise));
    const double innovation = measured - filter.x[0];
    filter.apply(static_cast<Real>(innovation));
    return -0.5 * (std::log(2.0 * std::numbers::pi * variance) + innovation * innovation / variance);
}

// Exactly diffuse: after the first year the level is that year's flow, with its noise.
template <class Real, std::size_t N>
void begin_diffuse(UdFilter<Real, N>& filter) {
    typename UdFilter<Real, N>::Vector variance{};
    variance[0] = static_cast<Real>(kNileNoise);
    filter.set_diagonal(variance);
    filter.x[0] = static_cast<Real>(kNile[0]);
}

struct Smoothed {
    double level = 0.0, variance = 0.0;
};

// Smoothed level of a year by a second state that stays at it (fixed-point smoother).
Smoothed smoothed(std::size_t year, bool with_missing) {
    UdFilter<double, 2> filter;
    begin_diffuse(filter);
    for (std::size_t t = 2; t <= kNile.size(); ++t) {
        filter.add_noise(0, kNileLevelNoise);
        if (t == year) {
            const double variance = filter.variance(0);
            filter.set_diagonal({});
            filter.add_rank_one({1.0, 1.0}, variance);
            filter.x[1] = filter.x[0];
        }
        if (!(with_missing && nile_missing(t))) (void)take(filter, kNile[t - 1]);
    }
    return {filter.x[1], filter.variance(1)};
}

}  // namespace

TEMPLATE_TEST_CASE("Nile: log-likelihood, diffuse, terms 2 to 100", "", double, float) {
    UdFilter<TestType, 1> filter;
    begin_diffuse(filter);
    double log_likelihood = 0.0;
    for (std::size_t t = 2; t <= kNile.size(); ++t) {
        filter.add_noise(0, static_cast<TestType>(kNileLevelNoise));
        log_likelihood += take(filter, kNile[t - 1]);
    }
    CHECK(log_likelihood == Approx(-632.545625).margin(sizeof(TestType) == 4 ? 2e-4 : 2e-6));  // computed
    CHECK(filter.x[0] ==
          Approx(798.370293).epsilon(sizeof(TestType) == 4 ? 1e-5 : 1e-8));  // computed, t = 100
    CHECK(filter.variance(0) == Approx(4032.157942).epsilon(sizeof(TestType) == 4 ? 1e-5 : 1e-8));
}

TEST_CASE("Nile: a wide prior, log-likelihood and the second year") {
    UdFilter<double, 1> filter;
    filter.set_diagonal({1e7});
    double log_likelihood = take(filter, kNile[0]);
    filter.add_noise(0, kNileLevelNoise);
    CHECK(filter.x[0] == Approx(1118.31146).margin(1e-5));          // computed
    CHECK(filter.variance(0) == Approx(16545.33639).margin(1e-5));  // computed
    log_likelihood += take(filter, kNile[1]);
    CHECK(filter.gain()[0] == Approx(0.522853).margin(1e-6));  // computed
    for (std::size_t t = 3; t <= kNile.size(); ++t) {
        filter.add_noise(0, kNileLevelNoise);
        log_likelihood += take(filter, kNile[t - 1]);
    }
    CHECK(log_likelihood == Approx(-641.585578).margin(2e-6));  // computed
}

TEST_CASE("Nile: steady state") {
    UdFilter<double, 1> filter;
    begin_diffuse(filter);
    for (std::size_t t = 2; t <= kNile.size(); ++t) {
        filter.add_noise(0, kNileLevelNoise);
        if (t == kNile.size()) CHECK(filter.variance(0) == Approx(5501.257942).margin(1e-5));  // closed form
        (void)take(filter, kNile[t - 1]);
    }
    CHECK(filter.gain()[0] == Approx(0.2670480126).margin(1e-9));  // closed form
}

TEST_CASE("Nile: years without a measurement") {
    UdFilter<double, 1> filter;
    begin_diffuse(filter);
    double log_likelihood = 0.0;
    for (std::size_t t = 2; t <= kNile.size(); ++t) {
        filter.add_noise(0, kNileLevelNoise);
        if (!nile_missing(t)) log_likelihood += take(filter, kNile[t - 1]);
    }
    // The computed value counts the diffuse first year's constant, -1/2 ln 2 pi, too.
    log_likelihood -= 0.5 * std::log(2.0 * std::numbers::pi);
    CHECK(log_likelihood == Approx(-381.506001).margin(2e-6));  // computed
}

TEST_CASE("Nile: smoothed levels through a state that stays at its year") {
    const Smoothed middle = smoothed(50, false);
    CHECK(middle.level == Approx(834.763259).margin(1e-6));  // computed
    CHECK(middle.variance == Approx(2326.756870).margin(1e-5));
    const Smoothed gap = smoothed(30, true);
    CHECK(gap.level == Approx(903.421103).margin(1e-6));  // computed
    CHECK(gap.variance == Approx(9715.005902).margin(1e-5));
}
