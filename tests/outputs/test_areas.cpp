// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <cmath>
#include <limits>

#include "estimator/outputs/areas.hpp"

using namespace holdfast;

namespace {

core::Estimate fast_and_closed(double cla_rear_m2, double sd_m2) {
    core::Estimate e;
    e.flags = 0;
    e.speed_mps = 80.0;
    e.attached = {1.0, 0.01};
    e.cla_front_m2 = {1.7, 0.05};
    e.cla_rear_m2 = {cla_rear_m2, sd_m2};
    e.cda_m2 = {1.3, 0.05};
    return e;
}

}  // namespace

TEST_CASE("many alike estimates are no surer than one of them") {
    outputs::WeightedMean mean;
    for (int i = 0; i < 1000; ++i) mean.add({2.0, 0.05});
    REQUIRE(mean.mean());
    CHECK(mean.mean()->value == Approx(2.0));
    CHECK(mean.mean()->sd == Approx(0.05));
}

TEST_CASE("values that scatter more than they claim are believed by their scatter") {
    outputs::WeightedMean mean;
    for (int i = 0; i < 100; ++i) mean.add({i % 2 == 0 ? 1.5 : 2.5, 0.05});
    CHECK(mean.mean()->value == Approx(2.0));
    CHECK(mean.mean()->sd == Approx(0.5));
}

TEST_CASE("the surer value weighs more, by inverse variance") {
    outputs::WeightedMean mean;
    mean.add({1.0, 0.1});
    mean.add({2.0, 0.2});
    CHECK(mean.mean()->value == Approx((1.0 / 0.01 + 2.0 / 0.04) / (1.0 / 0.01 + 1.0 / 0.04)));
}

TEST_CASE("a value without a usable uncertainty is left out") {
    outputs::WeightedMean mean;
    mean.add({1.0, 0.0});
    mean.add({1.0, std::nan("")});
    mean.add({std::numeric_limits<double>::infinity(), 0.1});
    CHECK(mean.count() == 0);
    CHECK_FALSE(mean.mean());
}

TEST_CASE("only steady, fast, converged estimates count, open and closed apart") {
    outputs::Areas areas;
    areas.add(fast_and_closed(2.4, 0.05));

    core::Estimate open = fast_and_closed(1.8, 0.05);
    open.flags = core::kFlapOpen;
    open.attached = {0.0, 0.01};
    areas.add(open);

    core::Estimate slow_car = fast_and_closed(9.0, 0.05);
    slow_car.speed_mps = 49.0;
    areas.add(slow_car);
    core::Estimate half_back = fast_and_closed(9.0, 0.05);
    half_back.attached = {0.5, 0.1};
    areas.add(half_back);
    for (const auto flag : {core::kNotConverged, core::kStale, core::kReattaching}) {
        core::Estimate unfit = fast_and_closed(9.0, 0.05);
        unfit.flags = flag;
        areas.add(unfit);
    }

    CHECK(areas.closed().cla_rear_m2.count() == 1);
    CHECK(areas.closed().cla_rear_m2.mean()->value == Approx(2.4));
    CHECK(areas.open().cla_rear_m2.count() == 1);
    CHECK(areas.open().cla_rear_m2.mean()->value == Approx(1.8));
}
