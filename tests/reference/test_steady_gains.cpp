// SPDX-License-Identifier: MIT
// Gains that a filter settles at, against closed forms; and the exact step of a first-order process.
#include <catch2/catch.hpp>
#include <cmath>

#include "estimator/core/ud_filter.hpp"

namespace {

using holdfast::core::UdFilter;

struct AlphaBeta {
    double alpha = 0.0, beta = 0.0;
};

// Position and rate under piecewise constant white acceleration, position measured; Kalata's tracking index
// is (acceleration's sd) dt^2 / (measurement's sd).
AlphaBeta settled(double tracking_index) {
    constexpr double kDt = 0.25, kNoise = 4.0;
    const double accel_variance = tracking_index * tracking_index * kNoise / (kDt * kDt * kDt * kDt);
    UdFilter<double, 2> filter;
    filter.set_diagonal({kNoise, kNoise});
    for (int step = 0; step < 2000; ++step) {
        const double u = filter.column(1)[0];
        std::array<std::array<double, 3>, 2> rows{{{1.0, u + kDt, 0.5 * kDt * kDt}, {0.0, 1.0, kDt}}};
        filter.triangularize<2, 1>(rows, {accel_variance});
        (void)filter.expect({1.0, 0.0}, kNoise);
        filter.apply(0.0);
    }
    return {filter.gain()[0], filter.gain()[1] * kDt};
}

}  // namespace

TEST_CASE("steady gains of position and rate follow Kalata's tracking index") {
    // Kalata, IEEE Trans. Aerospace and Electronic Systems AES-20, 1984; values computed from the closed form
    // and from scipy's Riccati solver, which agree.
    const AlphaBeta slow = settled(0.1);
    CHECK(slow.alpha == Approx(0.360000).margin(1e-6));
    CHECK(slow.beta == Approx(0.080000).margin(1e-6));
    const AlphaBeta even = settled(1.0);
    CHECK(even.alpha == Approx(0.75).margin(1e-9));
    CHECK(even.beta == Approx(0.5).margin(1e-9));
    const AlphaBeta quick = settled(10.0);
    CHECK(quick.alpha == Approx(0.978714).margin(1e-6));
    CHECK(quick.beta == Approx(1.458980).margin(1e-6));
}

TEST_CASE("one step of a first-order (Gauss-Markov) process") {
    // dt 0.01 s, time constant 0.5 s, variance 1: e^(-dt/tau) and 1 - e^(-2 dt/tau), closed forms.
    const double keep = std::exp(-0.01 / 0.5);
    const auto step = [&](UdFilter<double, 2>& filter) {
        filter.x[1] *= keep;
        filter.scale_state(1, keep);
        filter.add_noise(1, 1.0 - keep * keep);
    };
    UdFilter<double, 2> filter;
    filter.set_diagonal({1.0, 0.0});
    filter.x[1] = 1.0;
    step(filter);
    CHECK(filter.x[1] == Approx(0.9801986733).margin(1e-10));
    CHECK(filter.variance(1) == Approx(0.0392105608).margin(1e-10));
    for (int i = 0; i < 5000; ++i) step(filter);
    CHECK(filter.variance(1) == Approx(1.0).margin(1e-9));  // it settles at the process's own variance
}
