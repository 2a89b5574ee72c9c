// SPDX-License-Identifier: MIT
// The engine's learned values, with what their filters cannot know of themselves.
#include <cmath>

#include "estimator/core/engine.hpp"
#include "estimator/core/small_math.hpp"

namespace holdfast::core {
namespace {

// Loads and ride heights have scales that are off by 1 % each, common practice; dampers that are stiffer in
// rebound pull the car down as the road shakes it, links and tyres' growth are not quite as the file has
// them. With the fit's own uncertainty it comes to 2 to 4 %; on 32 axles of simulated cars the rate was
// within 2.3 % rms of the truth.
constexpr double kRateFloor = 0.02;
constexpr double kOffsetFloor_weights = 0.02;  // a load's scale on the weight at rest, and its drift
// The wheels' own masses carry about a tenth of the transfer; whether past the springs depends on the links.
constexpr double kTransferFloor = 0.10;

template <class Filter>
Quantity state(const Filter& filter, std::size_t i) {
    return {filter.x[i], std::sqrt(filter.variance(i))};
}

Quantity with_floor(const Quantity& q, double floor) {
    return {q.value, std::hypot(q.sd, floor)};
}

}  // namespace

Learned Engine::learned() const {
    const auto& car = chassis_.filter();
    const auto& along = longitudinal_.filter();
    const auto axle = [&](bool rear) {
        const AxleCompliance& compliance = compliance_.axle(rear);
        const ChassisConstants& constants = chassis_.constants();
        const double weight_n = rear ? constants.weight_rear_n : constants.weight_front_n;
        LearnedAxle out;
        if (compliance.known()) {
            const Quantity rate = compliance.rate_npm();
            out.rate_npm = with_floor(rate, kRateFloor * rate.value);
        }
        out.load_offset_n = with_floor(state(car, rear ? kLoadOffsetRear : kLoadOffsetFront),
                                       kOffsetFloor_weights * weight_n);
        out.transfer = with_floor(state(car, rear ? kTransferRear : kTransferFront), kTransferFloor);
        out.area_m2 = state(car, rear ? kAreaRear : kAreaFront);
        out.slope_m = state(car, rear ? kSlopeRear : kSlopeFront);
        out.flap_m2 = state(car, rear ? kFlapAreaRear : kFlapAreaFront);
        return out;
    };
    Learned out;
    out.front = axle(false);
    out.rear = axle(true);
    out.slip_drive = state(along, kSlipDrive);
    out.slip_brake = state(along, kSlipBrake);
    out.accel_offset_mps2 = state(along, kAccelOffset);
    out.accel_gain = state(along, kAccelGain);
    out.drive_gain = state(along, kDriveGain);
    if (intake_.health()[index(Channel::pitot_pressure)].samples > 0)
        out.pitot_scale = {pitot_calibration_.scale(), pitot_calibration_.scale_sd()};
    return out;
}

}  // namespace holdfast::core
