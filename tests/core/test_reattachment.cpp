// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>

#include "estimator/core/reattachment.hpp"

using namespace holdfast::core;

TEST_CASE("time to 95 % by shape, in time constants") {
    // Inverted by hand: 1 - e^-u = 0.95; sqrt(x) = sqrt(1 + 3 * 0.95) - 1.
    CHECK(time_to_95(Shape::first_order) == Approx(std::log(20.0)).epsilon(1e-9));
    const double root = std::sqrt(3.85) - 1.0;
    CHECK(time_to_95(Shape::separation_point) == Approx(-std::log(1.0 - root * root)).epsilon(1e-9));
    const double tail = time_to_95(Shape::slow_tail);
    CHECK((1.0 - kTailShare) * std::exp(-tail) + kTailShare * std::exp(-tail / kTailRatio) ==
          Approx(0.05).epsilon(1e-9));
    CHECK(time_to_95(Shape::separation_point) < time_to_95(Shape::first_order));
    CHECK(tail > time_to_95(Shape::first_order));
}

TEST_CASE("every shape begins at nothing, rises all the way and ends at one") {
    const auto shape = GENERATE(Shape::first_order, Shape::separation_point, Shape::slow_tail);
    CHECK(share_back_at(shape, -1.0) == 0.0);
    CHECK(share_back_at(shape, 0.0) == 0.0);
    CHECK(share_back_at(shape, 1e-12) == Approx(0.0).margin(1e-5));
    CHECK(share_back_at(shape, 200.0) == Approx(1.0).epsilon(1e-12));
    CHECK(share_back_at(shape, time_to_95(shape)) == Approx(0.95).epsilon(1e-12));
    double before = 0.0;
    for (double u = 0.01; u < 20.0; u += 0.01) {
        const double now = share_back_at(shape, u);
        REQUIRE(now > before);
        before = now;
    }
    CHECK(before < 1.0);
}

TEST_CASE("separation point: lift of Goman and Khrabrov less its detached part") {
    // ((1 + sqrt x) / 2)^2 is 1/4 where the flow is wholly separated and 1 where it is attached.
    for (const double u : {0.1, 0.7, 2.0}) {
        const double lift = std::pow(0.5 * (1.0 + std::sqrt(1.0 - std::exp(-u))), 2);
        CHECK(share_back_at(Shape::separation_point, u) == Approx((lift - 0.25) / 0.75));
    }
}
