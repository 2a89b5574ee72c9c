// SPDX-License-Identifier: MIT
// Which channel the engine distrusts, and what is missing.
#include <algorithm>
#include <cmath>

#include "estimator/core/engine.hpp"
#include "estimator/core/small_math.hpp"

namespace holdfast::core {
namespace {

constexpr double kStrained = 0.6;        // of what breaks a relation
constexpr double kSpeedCoasts_s = 20.0;  // the accelerometer alone holds the speed for so long

}  // namespace

// A channel named for having jumped or drifted is heard on, to notice that it is right again; its filter
// refuses what is wrong.
bool Engine::heard(const Frame& frame, std::uint64_t admitted, Channel c) const {
    if (has(admitted, c)) return true;
    const ChannelHealth& h = intake_.health()[index(c)];
    const bool off = h.fault == Fault::jumped || h.fault == Fault::drifting;
    return h.trust == Trust::distrusted && off && frame.has(c) && std::isfinite(frame.get(c));
}

void Engine::distrust(Channel c, Fault fault) {
    ChannelHealth& h = intake_.health()[index(c)];
    if (h.trust != Trust::good) return;
    h.trust = Trust::distrusted;
    h.fault = fault;
    h.since_ns = time_ns_;
}

void Engine::trust_again(Channel c, Fault fault) {
    ChannelHealth& h = intake_.health()[index(c)];
    if (h.trust != Trust::distrusted || h.fault != fault) return;
    h.trust = Trust::good;
    h.fault = Fault::none;
    h.since_ns = time_ns_;
}

bool Engine::usable(Channel c) const {
    const ChannelHealth& h = intake_.health()[index(c)];
    return h.trust == Trust::good &&
           intake_.age_s(c, time_ns_) <= std::max(settings_.stale_s, 4.0 * h.interval_s);
}

void Engine::watch_sensors(const Frame& frame) {
    const double time_s = frame.time_s();
    front_watch_.see(frame);
    rear_watch_.see(frame);
    compliance_.see(frame, longitudinal_.speed_mps(), tyre_force_x_n(), intake_.health());
    if (frame.has(Channel::accel_y) && std::isfinite(frame.get(Channel::accel_y))) {
        accel_y_sum_ += frame.get(Channel::accel_y);
        accel_y_count_ += 1.0;
    }
    if (frame.has(Channel::pitot_pressure) && std::isfinite(frame.get(Channel::pitot_pressure))) {
        pitot_newest_pa_ = frame.get(Channel::pitot_pressure);
    }
    if (time_s < next_watch_s_) return;
    const double elapsed = std::clamp(time_s - watched_s_, AxleWatch::kEvery_s, 5.0 * AxleWatch::kEvery_s);
    next_watch_s_ = time_s + AxleWatch::kEvery_s;
    watched_s_ = time_s;
    intake_.expire(frame.time_ns);
    HealthTable& health = intake_.health();
    const bool lateral_seen = accel_y_count_ > 0.0;
    // Where both axles' sides strain, it may be the lateral acceleration: no other is named by it meanwhile.
    const bool both_strain =
        front_watch_.sides().strain() > kStrained && rear_watch_.sides().strain() > kStrained;
    const bool lateral = lateral_seen && usable(Channel::accel_y) && !both_strain;
    const double accel_y = lateral_seen ? accel_y_sum_ / accel_y_count_ : 0.0;
    accel_y_sum_ = accel_y_count_ = 0.0;
    // Both axles' sides at once: it is the lateral acceleration that both are compared with.
    if (lateral_seen) sides_refusal_.add(front_watch_.sides_broken() && rear_watch_.sides_broken(), elapsed);
    if (lateral_seen) sides_strain_.add(both_strain, elapsed);
    if (sides_refusal_.wrong()) distrust(Channel::accel_y, Fault::jumped);
    if (sides_strain_.wrong()) distrust(Channel::accel_y, Fault::jumped);
    if (sides_refusal_.right()) trust_again(Channel::accel_y, Fault::jumped);
    front_watch_.judge(elapsed, frame.time_ns, longitudinal_.speed_mps(), accel_y, lateral_seen, lateral,
                       health);
    rear_watch_.judge(elapsed, frame.time_ns, longitudinal_.speed_mps(), accel_y, lateral_seen, lateral,
                      health);
    watch_pitot(elapsed);
    watch_needed(frame.time_ns);
    tell_distrust(frame.time_ns);
}

// Data without which nothing can be said: an alarm when they stop, and "stale" until they come again.
void Engine::watch_needed(std::int64_t time_ns) {
    const auto watch = [&](Channel tells, bool there) {
        const std::uint64_t bit = std::uint64_t{1} << index(tells);
        if (!there && (stale_ & bit) == 0)
            alarms_.push(Alarm{AlarmKind::data_stale, time_ns, 0, tells, 1.0, {}});
        stale_ = there ? stale_ & ~bit : stale_ | bit;
    };
    const double time_s = static_cast<double>(time_ns) * 1e-9;
    const bool front_height = front_heights_.age_s(time_s) < settings_.stale_s;
    const bool rear_height = rear_heights_.age_s(time_s) < settings_.stale_s;
    const bool front_load = usable(Channel::load_fl) || usable(Channel::load_fr);
    const bool rear_load = usable(Channel::load_rl) || usable(Channel::load_rr);
    const bool early =
        time_s < start_s_ + settings_.stale_s;  // channels have their first sample when their turn comes
    const bool speed_held = have_accel_x_ && time_s - last_speed_s_ < kSpeedCoasts_s;
    watch(Channel::speed, early || usable(Channel::speed) || speed_held);
    watch(Channel::flap_position, early || usable(Channel::flap_position) || flap_stands_in());
    watch(Channel::load_fl, early || front_load || front_height);
    watch(Channel::load_rl, early || rear_load || rear_height);
    const std::uint64_t now = sources();
    if (now != sources_ && !early) sources_changed_s_ = time_s;
    sources_ = now;
    heights_known_ = (front_height || front_load) && (rear_height || rear_load);
}

void Engine::tell_distrust(std::int64_t time_ns) {
    for (std::size_t i = 0; i < kChannelCount; ++i) {
        const std::uint64_t bit = std::uint64_t{1} << i;
        const ChannelHealth& h = intake_.health()[i];
        const bool bad =
            h.trust == Trust::distrusted || h.fault == Fault::noisy || h.fault == Fault::drifting;
        if (bad && (told_ & bit) == 0) {
            alarms_.push(Alarm{AlarmKind::sensor_distrusted, time_ns, 0, static_cast<Channel>(i), 1.0, {}});
        }
        told_ = bad ? told_ | bit : told_ & ~bit;
    }
}

}  // namespace holdfast::core
