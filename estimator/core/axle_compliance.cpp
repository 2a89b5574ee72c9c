// SPDX-License-Identifier: MIT
#include "estimator/core/axle_compliance.hpp"

#include <algorithm>
#include <cmath>

#include "estimator/core/chassis_filter.hpp"
#include "estimator/core/small_math.hpp"

namespace holdfast::core {
namespace {

constexpr double kBlock_s = 0.2;
constexpr double kMovingFrom_mps = 10.0;   // stiction and pit stops say nothing
constexpr double kStraight_mps2 = 6.0;     // beyond, the outer wheel's stop and the roll of tyres matter
constexpr double kBraking_weights = 0.5;   // beyond, the axles lean on their dampers and links for seconds
constexpr std::uint32_t kKnownFrom = 150;  // blocks: half a minute
// Loads over rest, in weights of the axle, where the slope may change. The first lies below the load at which
// cars meet their bump stops.
constexpr double kFirstStep_weights = 0.5, kSecondStep_weights = 1.0;
constexpr double kComplianceSd = 0.30;  // relative to the car file's: the file is what is to be judged
constexpr double kStepSd = 0.30;        // of the compliance: a stop takes away up to half of it
constexpr double kLinksSd = 0.30;       // relative
constexpr double kOffsetSd_m = 0.005;
// Of one block against the relation. The blocks' errors (road, dampers) keep their sign for about a second,
// so that this is some twice their size.
constexpr double kNoise_m = 0.0006;
constexpr double kOffsetDrift_m = 1e-5;  // from block to block: sensors that drift

double series_rate_npm(const Axle& axle) {
    const double wheel = axle.wheel_rate_npm.value, tyre = axle.tyre_rate_npm.value;
    return 2.0 * wheel * tyre / (wheel + tyre);
}

}  // namespace

AxleCompliance::AxleCompliance(const Car& car, bool rear)
    : weight_n_(rear ? ChassisConstants(car).weight_rear_n : ChassisConstants(car).weight_front_n) {
    const Axle& axle = rear ? car.rear : car.front;
    const double compliance = 1.0 / series_rate_npm(axle);
    const double by_links = 0.5 / axle.tyre_rate_npm.value;  // the tyres alone
    filter_.x = {compliance, 0.0, 0.0, by_links, car.tyre_growth_s2pm.value, 0.0};
    filter_.set_diagonal({square(kComplianceSd * compliance), square(kStepSd * compliance),
                          square(kStepSd * compliance), square(kLinksSd * by_links),
                          square(car.tyre_growth_s2pm.sd), square(kOffsetSd_m)});
}

void AxleCompliance::learn(const Block& block) {
    const double f = block.over_rest_n;
    const UdFilter<double, kCount>::Vector h{f,
                                             std::max(0.0, f - kFirstStep_weights * weight_n_),
                                             std::max(0.0, f - kSecondStep_weights * weight_n_),
                                             block.links_n,
                                             -square(block.speed_mps),
                                             1.0};
    double predicted = 0.0;
    for (std::size_t i = 0; i < kCount; ++i) predicted += h[i] * filter_.x[i];
    filter_.add_noise(kOffset, square(kOffsetDrift_m));
    (void)filter_.expect(h, square(kNoise_m));
    filter_.apply(block.travel_m - predicted);
    ++blocks_;
}

Quantity AxleCompliance::rate_npm() const {
    const double rate = 1.0 / filter_.x[kCompliance];
    return {rate, square(rate) * std::sqrt(filter_.variance(kCompliance))};
}

bool AxleCompliance::known() const {
    return blocks_ >= kKnownFrom && filter_.x[kCompliance] > 0.0;
}

ChassisCompliance::ChassisCompliance(const Car& car)
    : front_(car, false),
      rear_(car, true),
      sensor_(car.ride_height),
      sensor_count_(car.ride_height_count),
      wheelbase_m_(car.wheelbase_m) {
    const ChassisConstants constants(car);
    weight_front_n_ = constants.weight_front_n;
    weight_rear_n_ = constants.weight_rear_n;
    link_per_force_ = constants.link_per_force;
    anti_dive_ = constants.anti_dive;
    anti_lift_ = constants.anti_lift;
    anti_squat_ = constants.anti_squat;
}

void ChassisCompliance::see(const Frame& frame, double speed_mps, double tyre_force_x_n,
                            const HealthTable& health) {
    const double time_s = frame.time_s();
    if (in_block_ && time_s - block_began_s_ >= kBlock_s) {
        // A pause in the frames makes no mean of what lies before and after it.
        if (time_s - block_began_s_ < 2.0 * kBlock_s) end_block(health);
        in_block_ = false;
    }
    if (!in_block_) {
        mean_.fill(Mean{});
        speed_ = tyre_force_ = Mean{};
        block_began_s_ = time_s;
        in_block_ = true;
    }
    const auto take = [&](Channel c) {
        if (frame.has(c) && std::isfinite(frame.get(c))) mean_[index(c)].add(frame.get(c));
    };
    for (const Channel c :
         {Channel::load_fl, Channel::load_fr, Channel::load_rl, Channel::load_rr, Channel::accel_y})
        take(c);
    for (std::size_t i = 0; i < sensor_count_; ++i) take(sensor_[i].channel);
    speed_.add(speed_mps);
    tyre_force_.add(tyre_force_x_n);
}

bool ChassisCompliance::sound(Channel c, const HealthTable& health) const {
    const ChannelHealth& h = health[index(c)];
    return mean(c).count > 0.0 && h.trust == Trust::good && h.fault == Fault::none;
}

void ChassisCompliance::end_block(const HealthTable& health) {
    const bool cornering =
        mean(Channel::accel_y).count > 0.0 && std::abs(mean(Channel::accel_y).value()) > kStraight_mps2;
    const bool braking = tyre_force_.value() < -kBraking_weights * (weight_front_n_ + weight_rear_n_);
    if (speed_.value() < kMovingFrom_mps || cornering || braking) return;
    for (const Channel c : {Channel::load_fl, Channel::load_fr, Channel::load_rl, Channel::load_rr})
        if (!sound(c, health)) return;
    Mean front_height, rear_height, front_x, rear_x;  // of the sensors of each axle
    for (std::size_t i = 0; i < sensor_count_; ++i) {
        const RideHeightSensor& s = sensor_[i];
        if (!sound(s.channel, health)) return;
        const bool rear = s.x_m < -0.5 * wheelbase_m_;
        (rear ? rear_height : front_height).add(mean(s.channel).value() - s.static_m.value);
        (rear ? rear_x : front_x).add(s.x_m);
    }
    if (front_height.count == 0.0 || rear_height.count == 0.0) return;
    // Sensors sit before or behind their axle: along the line through both to the axles.
    const double slope = (front_height.value() - rear_height.value()) / (front_x.value() - rear_x.value());
    const double at_front = front_height.value() - slope * front_x.value();
    const double at_rear = at_front - slope * wheelbase_m_;
    const double transfer_n = link_per_force_ * tyre_force_.value();  // off the front, positive driving
    const double links_front_n = transfer_n < 0.0 ? -anti_dive_ * transfer_n : 0.0;
    const double links_rear_n = (transfer_n < 0.0 ? anti_lift_ : anti_squat_) * transfer_n;
    const auto load = [&](Channel left, Channel right) { return mean(left).value() + mean(right).value(); };
    front_.learn({.over_rest_n = load(Channel::load_fl, Channel::load_fr) - weight_front_n_,
                  .travel_m = -at_front,
                  .links_n = links_front_n,
                  .speed_mps = speed_.value()});
    rear_.learn({.over_rest_n = load(Channel::load_rl, Channel::load_rr) - weight_rear_n_,
                 .travel_m = -at_rear,
                 .links_n = links_rear_n,
                 .speed_mps = speed_.value()});
}

}  // namespace holdfast::core
