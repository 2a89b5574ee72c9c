// SPDX-License-Identifier: MIT
#include "estimator/core/intake.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

namespace holdfast::core {
namespace {

constexpr double kGapIntervals = 3.0;        // a pause of more usual intervals than this is a gap
constexpr double kStuckAfter_s = 0.1;        // a lively channel that shows one value for longer is stuck
constexpr std::uint64_t kStuckSamples = 12;  // and for at least so many samples
constexpr double kLivelyShare = 0.8;         // changes from sample to sample on so many samples: lively
constexpr std::uint64_t kMovingAgain = 40;   // changing samples after which a stuck channel is believed again
constexpr double kSpikeNoise =
    14.0;  // times the noise, from one sample to the next: further than any car moves
constexpr double kFlapJump = 0.2, kFlapTravel_s = 0.016;  // no flap travels all its way in less
constexpr double kSpikeMemory_s = 4.0;
constexpr double kSpikesNoisy = 5.0;  // so many of late: the channel is called noisy
constexpr double kGoneAfter_s = 0.3;
constexpr double kGoneIntervals = 12.0;
constexpr double kSqrtSix = 2.449489742783178;  // sd of a second difference of white noise of sd 1

// Channels that no jump of the car's own makes look like a spike; the others step by nature (gear changes,
// brakes, flap).
bool can_spike(Channel c) {
    switch (c) {
        case Channel::speed:
        case Channel::load_fl:
        case Channel::load_fr:
        case Channel::load_rl:
        case Channel::load_rr:
        case Channel::accel_x:
        case Channel::accel_y:
        case Channel::accel_z:
        case Channel::pitot_pressure:
        case Channel::yaw_rate:
        case Channel::flap_position:
            return true;
        default:
            return is_ride_height(c);
    }
}

// Channels whose sensor's noise shows in every sample of a moving car, so that one value for long is a fault.
// Others rest by nature: pedals and drive at their ends, speed at standstill, slow channels.
bool can_stick(Channel c, double value) {
    constexpr double kMoving_mps = 3.0;
    if (c == Channel::speed) return value > kMoving_mps;
    if (c == Channel::drive_force || c == Channel::brake_pressure) return value != 0.0;
    return can_spike(c) || c == Channel::flap_position;
}

}  // namespace

double Intake::age_s(Channel c, std::int64_t now_ns) const {
    const ChannelHealth& h = health_[index(c)];
    if (h.samples == 0) return std::numeric_limits<double>::infinity();
    return static_cast<double>(now_ns - h.last_time_ns) * 1e-9;
}

void Intake::count_repeats(const Frame& frame) {
    for (std::size_t i = 0; i < kChannelCount; ++i) {
        if (frame.has(static_cast<Channel>(i))) ++health_[i].repeats;
    }
}

std::uint64_t Intake::admit(const Frame& frame) {
    std::uint64_t admitted = 0;
    for (std::uint64_t rest = frame.present; rest != 0; rest &= rest - 1) {
        const auto i = static_cast<std::size_t>(__builtin_ctzll(rest));
        if (admit(static_cast<Channel>(i), frame.time_ns, frame.value[i])) admitted |= std::uint64_t{1} << i;
    }
    return admitted;
}

bool Intake::admit(Channel c, std::int64_t time_ns, double value) {
    ChannelHealth& h = health_[index(c)];
    h.status.time_ns = time_ns;
    h.status.value = value;
    if (!std::isfinite(value)) {
        ++h.not_finite;
        h.status.result = FusionResult::not_finite;
        return false;
    }
    if (value < info(c).least || value > info(c).most) {
        ++h.out_of_range;
        h.status.result = FusionResult::out_of_range;
        return false;
    }
    Learned& l = learned_[index(c)];
    if (can_spike(c) && is_spike(c, l, h, value, static_cast<double>(time_ns - h.last_time_ns) * 1e-9)) {
        ++h.gated;
        h.status.result = FusionResult::gated;
        return false;
    }
    learn(c, l, h, time_ns, value);
    h.status.result = h.trust == Trust::distrusted ? FusionResult::distrusted : FusionResult::not_tried;
    return h.trust == Trust::good;
}

// A sample far from the one before is held back; if the next one lies on the same side, the channel has
// really moved.
bool Intake::is_spike(Channel c, Learned& l, ChannelHealth& h, double value, double since_s) {
    l.spikes *= std::exp(-std::min(since_s, 1.0) / kSpikeMemory_s);
    if (h.fault == Fault::noisy && l.spikes < 1.0) h.fault = Fault::none;
    if (h.samples < 100 || l.moving_share < kLivelyShare || l.noise_sd <= 0.0 ||
        since_s > kGapIntervals * h.interval_s) {
        l.suspect = false;
        return false;
    }
    // A flap moves far and fast, its sensor has next to no noise.
    const double limit =
        c == Channel::flap_position ? std::max(kFlapJump, since_s / kFlapTravel_s) : kSpikeNoise * l.noise_sd;
    if (std::abs(value - h.last_value) <= limit) {
        l.suspect = false;
        return false;
    }
    const bool same_side = (value > h.last_value) == (l.suspect_value > h.last_value);
    if (l.suspect && same_side) {
        l.suspect = false;
        l.spikes = std::max(l.spikes - 1.0, 0.0);
        return false;
    }
    l.suspect = true;
    l.suspect_value = value;
    l.spikes += 1.0;
    if (l.spikes > kSpikesNoisy && h.fault == Fault::none) {
        h.fault = Fault::noisy;
        h.since_ns = h.status.time_ns;
    }
    return true;
}

void Intake::expire(std::int64_t now_ns) {
    for (ChannelHealth& h : health_) {
        if (h.samples < 20 || h.trust != Trust::good) continue;
        const double age_s = static_cast<double>(now_ns - h.last_time_ns) * 1e-9;
        if (age_s < std::max(kGoneAfter_s, kGoneIntervals * h.interval_s)) continue;
        h.trust = Trust::distrusted;
        h.fault = Fault::gone;
        h.since_ns = h.last_time_ns;
    }
}

void Intake::learn(Channel c, Learned& l, ChannelHealth& h, std::int64_t time_ns, double value) {
    const bool first = h.samples == 0;
    const double since_s = static_cast<double>(time_ns - h.last_time_ns) * 1e-9;
    if (first) {
        h.trust = Trust::good;
        h.since_ns = time_ns;
    } else if (h.samples > 8 && since_s > kGapIntervals * h.interval_s) {
        ++h.gaps;
        l.in_a_row = 0;
    } else {
        h.interval_s +=
            (since_s - h.interval_s) * (h.samples < 20 ? 1.0 / static_cast<double>(h.samples) : 0.05);
    }
    const bool moved = first || value != h.last_value;
    if (!first)
        l.moving_share += ((moved ? 1.0 : 0.0) - l.moving_share) * (h.trust == Trust::good ? 0.01 : 0.0);
    if (moved) {
        l.same_in_a_row = 0;
        l.same_since_ns = time_ns;
        ++l.moving_again;
    } else {
        ++l.same_in_a_row;
        l.moving_again = 0;
    }
    // The share above decays while the channel is stuck, so it is compared before the run began to weigh on
    // it.
    const auto lively_before = [&] {
        return l.moving_share /
               std::pow(0.99, static_cast<double>(std::min<std::uint64_t>(l.same_in_a_row, 100)));
    };
    const bool stuck = can_stick(c, value) && l.same_in_a_row >= kStuckSamples &&
                       static_cast<double>(time_ns - l.same_since_ns) * 1e-9 > kStuckAfter_s &&
                       lively_before() > kLivelyShare;
    if (h.trust == Trust::distrusted && h.fault == Fault::gone) {
        h.trust = Trust::good;
        h.fault = Fault::none;
        h.since_ns = time_ns;
    }
    if (h.trust == Trust::good && stuck) {
        h.trust = Trust::distrusted;
        h.fault = Fault::stuck;
        h.since_ns = l.same_since_ns;
    } else if (h.trust == Trust::distrusted && h.fault == Fault::stuck && l.moving_again >= kMovingAgain) {
        h.trust = Trust::good;
        h.fault = Fault::none;
        h.since_ns = time_ns;
    }
    if (l.in_a_row >= 2) {
        const double second = std::abs(value - 2.0 * h.last_value + l.before) / kSqrtSix;
        // A median tracker: robust against movement and spikes, |N(0,1)| has its median at 0.6745.
        const double step = l.in_a_row < 500 ? 0.05 : 0.005;
        const double target = 0.6745 * l.noise_sd;
        if (l.noise_sd == 0.0) {
            l.noise_sd = second;
        } else {
            l.noise_sd *= second > target ? 1.0 + step : 1.0 - step;
        }
    }
    l.before = h.last_value;
    ++l.in_a_row;
    ++h.samples;
    h.last_time_ns = time_ns;
    h.last_value = value;
}

}  // namespace holdfast::core
