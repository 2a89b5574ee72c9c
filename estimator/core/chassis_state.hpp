// SPDX-License-Identifier: MIT
// The states of the chassis filter by name. SI units. Derivation: estimator/core/MODEL.md, equation labels
// [..].
#pragma once

#include <cstddef>

namespace holdfast::core {

enum ChassisState : std::size_t {
    // Motion of the sprung mass and the road under each axle: these move from step to step.
    kHeave,      // m, up from rest, at the sprung centre of gravity
    kHeaveRate,  // m/s
    kPitch,      // rad, nose down positive (ISO 8855)
    kPitchRate,  // rad/s
    kRoadFront,  // m, road (and every constant of the ride-height sensors) under the front sensors
    kRoadRear,   // m
    kMovingCount,
    // What the car is: these move slowly.
    kAccelZOffset = kMovingCount,  // m/s^2, measured minus true vertical acceleration
    kAreaFront,        // m^2, downforce area at the static ride height, flap closed and flow attached
    kAreaRear,         // m^2
    kSlopeFront,       // m^2/m, change of the front area with the front ride height
    kSlopeRear,        // m^2/m
    kCurveFront,       // m^2/m^2, change of the front slope with the front ride height
    kCurveRear,        // m^2/m^2
    kTransferFront,    // -, error of the share of the longitudinal load transfer that the front springs feel
    kTransferRear,     // -
    kLoadOffsetFront,  // N, measured minus true load of the axle, error of the static weight included
    kLoadOffsetRear,   // N
    kWindAlong,  // m/s, wind against the car when its course is north; where the course is not known: against
                 // the car
    kWindAcross,  // m/s, wind against the car when its course is east
    kGust,  // -, relative excess of dynamic pressure beside that; the pitot's gain error where there is one
    kFlapAreaFront,  // m^2, front area that goes with the flap's flow
    kFlapAreaRear,   // m^2, rear area that goes with the flap's flow; last, so that it can be conditioned on
    kChassisCount,
};

}  // namespace holdfast::core
