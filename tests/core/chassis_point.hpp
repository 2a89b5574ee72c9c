// SPDX-License-Identifier: MIT
// A chassis filter at a point where every state matters, with a full covariance of believable size.
#pragma once

#include <random>

#include "estimator/core/chassis_filter.hpp"
#include "tests/core/small_car.hpp"

namespace holdfast::testing {

using ChassisVector = core::ChassisFilter::Filter::Vector;

// About a standard deviation of each state as an outing leaves it, SI.
[[nodiscard]] inline ChassisVector chassis_scales() {
    using namespace core;
    ChassisVector s{};
    s[kHeave] = s[kRoadFront] = s[kRoadRear] = 1e-3;
    s[kHeaveRate] = 0.01;
    s[kPitch] = 5e-4;
    s[kPitchRate] = 5e-3;
    s[kAccelZOffset] = 0.1;
    s[kAreaFront] = s[kAreaRear] = 0.1;
    s[kSlopeFront] = s[kSlopeRear] = 2.0;
    s[kCurveFront] = s[kCurveRear] = 50.0;
    s[kTransferFront] = s[kTransferRear] = 0.03;
    s[kLoadOffsetFront] = s[kLoadOffsetRear] = 50.0;
    s[kWindAlong] = s[kWindAcross] = 1.0;
    s[kGust] = 0.01;
    s[kFlapAreaFront] = 0.05;
    s[kFlapAreaRear] = 0.1;
    return s;
}

[[nodiscard]] inline core::ChassisFilter chassis_at_a_point(std::uint64_t seed) {
    std::mt19937_64 random(seed);
    std::uniform_real_distribution<double> share(-1.0, 1.0);
    core::ChassisFilter chassis(small_car());
    auto& filter = chassis.filter();
    const ChassisVector scale = chassis_scales();
    filter.set_diagonal({});
    for (std::size_t j = 0; j < core::kChassisCount; ++j) {
        filter.diagonal(j) = scale[j] * scale[j] * (1.05 + share(random));
        for (std::size_t i = 0; i < j; ++i) filter.column(j)[i] = 0.5 * scale[i] / scale[j] * share(random);
        filter.x[j] += scale[j] * share(random);
    }
    return chassis;
}

}  // namespace holdfast::testing
