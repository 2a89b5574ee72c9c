// SPDX-License-Identifier: MIT
#include "estimator/core/axle_watch.hpp"

#include <cmath>

#include "estimator/core/chassis_filter.hpp"

namespace holdfast::core {
namespace {

constexpr double kBrokenFor_s = 0.25;     // before a name is given: kerbs are shorter
constexpr double kSlowBrokenFor_s = 0.8;  // the second's mean outlasts a kerb by so much
constexpr double kUndecidedFor_s = 1.5;   // then what disagrees is said, without a culprit
constexpr double kRestoredFor_s = 2.0;    // before a named channel is believed again
constexpr double kMovingFrom_mps = 8.0;   // stiction and pit stops say nothing
constexpr double kHalf = 0.5;             // two residuals agree in size when their ratio is above this

std::uint64_t bit(Channel c) {
    return std::uint64_t{1} << index(c);
}

Relation<4> sum_prior(const Car& car, bool rear) {
    const Axle& axle = rear ? car.rear : car.front;
    const double wheel = axle.wheel_rate_npm.value, tyre = axle.tyre_rate_npm.value;
    const double series = 2.0 * wheel * tyre / (wheel + tyre);
    constexpr double kBumpStop_npm2 =
        4e6;  // what bump stops may add, per metre of travel; common practice, no source
    return Relation<4>({series, 0.0, 2.0 * axle.damping_nspm.value, 0.0},
                       {0.10 * series, kBumpStop_npm2, axle.damping_nspm.value, 300.0},
                       {.noise_sd = 250.0, .fast_least = 1800.0, .slow_least = 700.0});
}

Relation<2> sides_prior(const Car& car) {
    const double gain = 0.5 * car.mass_kg.value * car.cg_height_m.value / car.front.track_m;
    return Relation<2>({-gain, 0.0}, {2.0 * gain, 300.0},
                       {.noise_sd = 250.0, .fast_least = 1100.0, .slow_least = 300.0});
}

Relation<2> roll_prior() {
    return Relation<2>({0.0, 0.0}, {0.002, 0.003},
                       {.noise_sd = 1e-3, .fast_least = 4.5e-3, .slow_least = 0.9e-3});
}

}  // namespace

AxleWatch::AxleWatch(const Car& car, bool rear)
    : left_(rear ? Channel::load_rl : Channel::load_fl),
      right_(rear ? Channel::load_rr : Channel::load_fr),
      weight_n_(rear ? ChassisConstants(car).weight_rear_n : ChassisConstants(car).weight_front_n),
      tyre_growth_s2pm_(car.tyre_growth_s2pm.value),
      sum_(sum_prior(car, rear)),
      sides_(sides_prior(car)),
      roll_(roll_prior()) {
    for (std::size_t i = 0; i < car.ride_height_count; ++i) {
        if ((car.ride_height[i].x_m < -0.5 * car.wheelbase_m) != rear) continue;
        sensor_[sensor_count_] = car.ride_height[i];
        if (sensor_[sensor_count_].y_m > sensor_[pair_left_].y_m) pair_left_ = sensor_count_;
        if (sensor_[sensor_count_].y_m < sensor_[pair_right_].y_m) pair_right_ = sensor_count_;
        ++sensor_count_;
    }
    pair_width_m_ = sensor_[pair_left_].y_m - sensor_[pair_right_].y_m;
    has_pair_ = sensor_count_ >= 2 && pair_width_m_ > 0.1;
}

void AxleWatch::see(const Frame& frame) {
    const auto take = [&](Channel c, Mean& mean, double less) {
        if (frame.has(c) && std::isfinite(frame.get(c))) mean.add(frame.get(c) - less);
    };
    take(left_, left_mean_, 0.0);
    take(right_, right_mean_, 0.0);
    for (std::size_t i = 0; i < sensor_count_; ++i)
        take(sensor_[i].channel, height_mean_[i], sensor_[i].static_m.value);
}

Relation<4>::Vector AxleWatch::height_vector(double dh_m, double rate_mps, double speed_mps) const {
    const double travel = -(dh_m - tyre_growth_s2pm_ * speed_mps * speed_mps);  // compression, m
    return {travel, travel * std::abs(travel), -rate_mps, 1.0};
}

double AxleWatch::load_from_height_n(double dh_m, double speed_mps) const {
    return weight_n_ + sum_.predict(height_vector(dh_m, 0.0, speed_mps));
}

double AxleWatch::height_from_load_m(double load_n, double speed_mps) const {
    // The relation is close to linear: two steps from the linear answer.
    const auto& x = sum_.filter().x;
    const double asked = load_n - weight_n_ - x[3];
    double travel = asked / x[0];
    for (int i = 0; i < 2; ++i) travel = asked / (x[0] + x[1] * std::abs(travel));
    return -travel + tyre_growth_s2pm_ * speed_mps * speed_mps;
}

double AxleWatch::roll_rad(double accel_y_mps2) const {
    return has_pair_ ? roll_.predict({accel_y_mps2, 1.0}) / pair_width_m_ : 0.0;
}

Quantity AxleWatch::rate_npm() const {
    return {sum_.filter().x[0], std::sqrt(sum_.filter().variance(0))};
}

void AxleWatch::judge(double elapsed_s, std::int64_t time_ns, double speed_mps, double accel_y_mps2,
                      bool accel_y_seen, bool accel_y_good, HealthTable& health) {
    const auto good = [&](Channel c) { return health[index(c)].trust == Trust::good; };
    const bool loads = left_mean_.any() && right_mean_.any();
    bool heights_good = true;
    double dh = 0.0, n = 0.0;
    for (std::size_t i = 0; i < sensor_count_; ++i) {
        if (!height_mean_[i].any()) continue;
        heights_good = heights_good && good(sensor_[i].channel);
        dh += height_mean_[i].value();
        n += 1.0;
    }
    const bool heights = n == static_cast<double>(sensor_count_) && n > 0.0;
    const bool loads_good = good(left_) && good(right_);
    const bool moving = speed_mps > kMovingFrom_mps;
    if (heights) {
        dh /= n;
        const double rate = have_before_ ? (dh - dh_before_m_) / elapsed_s : 0.0;
        if (loads && moving && have_before_) {
            sum_.observe(height_vector(dh, rate, speed_mps),
                         left_mean_.value() + right_mean_.value() - weight_n_, elapsed_s,
                         loads_good && heights_good && !strained_);
        }
        dh_before_m_ = dh;
    }
    have_before_ = heights;
    if (loads && accel_y_seen && moving) {
        sides_.observe({accel_y_mps2, 1.0}, left_mean_.value() - right_mean_.value(), elapsed_s,
                       loads_good && accel_y_good && !strained_);
    }
    if (has_pair_ && height_mean_[pair_left_].any() && height_mean_[pair_right_].any() && accel_y_seen &&
        moving) {
        roll_.observe({accel_y_mps2, 1.0},
                      height_mean_[pair_left_].value() - height_mean_[pair_right_].value(), elapsed_s,
                      heights_good && accel_y_good && !strained_);
    }
    left_mean_ = right_mean_ = Mean{};
    height_mean_.fill(Mean{});
    if (!moving) return;

    const bool fast = sum_.fast_broken() || sides_.fast_broken() || (has_pair_ && roll_.fast_broken());
    const bool slow = sum_.slow_broken() || sides_.slow_broken() || (has_pair_ && roll_.slow_broken());
    if (fast || slow) {
        if (!strained_) {
            strained_since_ns_ = time_ns;
            began_fast_ = fast;
        }
        strained_ = true;
        broken_s_ += elapsed_s;
    } else {
        broken_s_ = 0.0;
        strained_ = false;
    }
    const double enough_s = fast ? kBrokenFor_s : kSlowBrokenFor_s;
    if (accel_y_good && broken_s_ >= enough_s && named_ == 0) look_for_culprit(health);
    look_for_return(elapsed_s, health);
}

void AxleWatch::name(Channel c, Fault fault, std::int64_t since_ns, HealthTable& health) {
    ChannelHealth& h = health[index(c)];
    named_ |= bit(c);
    if (h.trust != Trust::good) return;  // the door has its own word for it
    h.trust = Trust::distrusted;
    h.fault = fault;
    h.since_ns = since_ns;
}

void AxleWatch::look_for_culprit(HealthTable& health) {
    const Fault fault = began_fast_ ? Fault::jumped : Fault::drifting;
    const bool sum_bad = sum_.fast_broken() || sum_.slow_broken();
    const bool sides_bad = sides_broken();
    const bool roll_bad = has_pair_ && (roll_.fast_broken() || roll_.slow_broken());
    const double sum_n = began_fast_ ? sum_.fast() : sum_.slow();
    const double sides_n = began_fast_ ? sides_.fast() : sides_.slow();
    const double ratio = std::abs(sum_n) / std::max(std::abs(sides_n), 1.0);
    if (sides_bad && !roll_bad && ratio > kHalf && ratio < 1.0 / kHalf) {
        name((sum_n > 0.0) == (sides_n > 0.0) ? left_ : right_, fault, strained_since_ns_, health);
    } else if (roll_bad && !sides_bad) {
        // A height that reads e too high moves the mean by e/2: the relation then misses load, so both signs
        // agree.
        const bool left = (sum_n > 0.0) == (roll_.slow() > 0.0);
        name(sensor_[left ? pair_left_ : pair_right_].channel, fault, strained_since_ns_, health);
    } else if (sum_bad && !sides_bad && !roll_bad && sensor_count_ == 1) {
        name(sensor_[0].channel, fault, strained_since_ns_, health);
    } else if (broken_s_ > kUndecidedFor_s) {
        // More than one sensor could be the one: say which disagree, distrust none.
        for_all_channels([&](Channel c) {
            ChannelHealth& h = health[index(c)];
            if (h.trust != Trust::good || h.fault != Fault::none) return;
            h.fault = Fault::disagrees;
            h.since_ns = strained_since_ns_;
        });
    }
}

void AxleWatch::look_for_return(double elapsed_s, HealthTable& health) {
    const bool back = sum_.restored() && sides_.restored() && (!has_pair_ || roll_.restored());
    restored_s_ = back ? restored_s_ + elapsed_s : 0.0;
    if (restored_s_ < kRestoredFor_s) return;
    for_all_channels([&](Channel c) {
        ChannelHealth& h = health[index(c)];
        const bool mine =
            h.fault == Fault::jumped || h.fault == Fault::drifting || h.fault == Fault::disagrees;
        if (!mine) return;
        h.trust = Trust::good;
        h.fault = Fault::none;
        h.since_ns = h.last_time_ns;
    });
    strained_ = false;
    named_ = 0;
    restored_s_ = 0.0;
}

}  // namespace holdfast::core
