// SPDX-License-Identifier: MIT
#include "estimator/core/engine.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "estimator/core/air.hpp"
#include "estimator/core/small_math.hpp"

namespace holdfast::core {
namespace {

constexpr double kSettleAfterChange_s =
    1.0;                                // a closing so soon after a load or height came or went is not judged
constexpr double kGapRestart_s = 0.05;  // a pause that the motion of the car does not survive
constexpr double kUnseenFor_s = 3.0;    // brakes within so much of a command belong to it
constexpr double kWindSd_mps = 2.0;     // wind that areas carry where air speed is not measured
constexpr double kMostAccel_mps2 = 30.0;  // how far off the speed may be after a pause
constexpr double kSlowFrom_mps = 20.0;
constexpr double kDragInTransfer = 0.5;
constexpr double kTurned_rad = 0.15;  // the car has turned by more than any course rounds away

}  // namespace

Engine::Engine(const Car& car, const Settings& settings)
    : car_(car),
      settings_(settings),
      longitudinal_(car),
      longitudinal_newer_(car),
      longitudinal_older_(car),
      chassis_(car),
      front_heights_(car, false),
      rear_heights_(car, true),
      front_watch_(car, false),
      rear_watch_(car, true),
      compliance_(car),
      tracker_(settings),
      air_density_kgpm3_(kStandardAirDensity_kgpm3),
      wind_variance_m2ps2_(square(kWindSd_mps)),
      lap_distance_m_(std::numeric_limits<double>::quiet_NaN()) {}

// In the middle of its lap.
double Engine::mass_kg() const {
    const double laps = have_lap_ ? std::max(lap_ - lap_first_, 0.0) + 0.5 : 0.0;
    return car_.mass_kg.value - car_.fuel_per_lap_kg.value * laps;
}

double Engine::dynamic_pressure_pa() const {
    return measured_pressure_pa() * chassis_.wind_factor();
}

// Before the wind state: from the pitot where there is one, else from the speed over ground.
double Engine::measured_pressure_pa() const {
    return 0.5 * air_density_kgpm3_ * square(longitudinal_.speed_mps()) * pitot_ratio_;
}

// Net force of the tyres along x: what accelerates the car and what the air takes.
double Engine::tyre_force_x_n() const {
    return mass_kg() * accel_x_mps2_ + drag_n();
}

// What the links carry their shares of. A share of the load transfer: of the force that accelerates the car,
// and of that which holds the air's too, as far as the air does not act at the height of the ground: half of
// it is taken.
double Engine::transfer_force_n(double accel_mps2) const {
    return mass_kg() * accel_mps2 + kDragInTransfer * drag_n();
}

StepResult Engine::step(const Frame& frame) {
    if (started_ && frame.time_ns <= time_ns_) {
        intake_.count_repeats(frame);
        return frame.time_ns == time_ns_ ? StepResult::repeated : StepResult::out_of_order;
    }
    const double dt_s = started_ ? static_cast<double>(frame.time_ns - time_ns_) * 1e-9 : 0.0;
    time_ns_ = frame.time_ns;
    const std::uint64_t admitted = intake_.admit(frame);
    const double time_s = frame.time_s();
    note_slow_channels(frame, admitted);
    if (!started_) {
        started_ = true;
        start_s_ = time_s;
        next_drift_s_ = time_s + kDriftEvery_s;
        if (has(admitted, Channel::speed)) longitudinal_.restart(frame.get(Channel::speed));
    } else if (dt_s > kGapRestart_s) {
        longitudinal_.filter().add_noise(kSpeed, square(kMostAccel_mps2 * dt_s));
        restart_motion(time_s);
    }
    const double step_s = std::min(dt_s, kGapRestart_s);
    step_longitudinal(frame, admitted, step_s);
    follow_heading(frame, admitted, step_s);
    find_brakes(frame, admitted);
    step_flap(frame, admitted);
    step_chassis(frame, admitted, step_s);
    watch_sensors(frame);
    if (tracker_.waiting())
        tracker_.tick(aero_now(time_s), std::max(front_road_.colour(), rear_road_.colour()),
                      chassis_.filter());
    collect();
    return StepResult::done;
}

void Engine::note_slow_channels(const Frame& frame, std::uint64_t admitted) {
    if (has(admitted, Channel::yaw_rate)) yaw_rate_radps_ = frame.get(Channel::yaw_rate);
    if (has(admitted, Channel::accel_y)) {
        accel_y_mps2_ = frame.get(Channel::accel_y);
    } else if (!usable(Channel::accel_y)) {
        accel_y_mps2_ = usable(Channel::yaw_rate) ? yaw_rate_radps_ * longitudinal_.speed_mps() : 0.0;
    }
    if (has(admitted, Channel::lap)) {
        if (!have_lap_) lap_first_ = frame.get(Channel::lap);
        have_lap_ = true;
        lap_ = frame.get(Channel::lap);
    }
    if (has(admitted, Channel::lap_distance)) lap_distance_m_ = frame.get(Channel::lap_distance);
    bool air_changed = false;
    const auto air = [&](Channel c, double& value) {
        if (!has(admitted, c)) return;
        value = frame.get(c);
        air_changed = true;
    };
    air(Channel::air_temperature, temperature_k_);
    air(Channel::air_pressure, pressure_pa_);
    air(Channel::relative_humidity, humidity_);
    if (air_changed && temperature_k_ > 0.0 && pressure_pa_ > 0.0) {
        air_density_kgpm3_ = moist_air_density(temperature_k_, pressure_pa_, humidity_);
    }
}

// The course over ground. One that stands still while the car turns is stuck; without it the wind's direction
// is forgotten turn by turn.
void Engine::follow_heading(const Frame& frame, std::uint64_t admitted, double dt_s) {
    if (frame.has(Channel::heading)) {
        if (frame.get(Channel::heading) != heading_before_rad_) turned_since_rad_ = 0.0;
        heading_before_rad_ = frame.get(Channel::heading);
        turned_since_rad_ += dt_s * accel_y_mps2_ / std::max(longitudinal_.speed_mps(), 10.0);
        if (std::abs(turned_since_rad_) > kTurned_rad) distrust(Channel::heading, Fault::stuck);
    }
    have_heading_ = usable(Channel::heading);
    if (has(admitted, Channel::heading) && have_heading_) course_rad_ = frame.get(Channel::heading);
}

void Engine::step_flap(const Frame& frame, std::uint64_t admitted) {
    const double time_s = frame.time_s();
    if (has(admitted, Channel::flap_command)) {
        const double asked = frame.get(Channel::flap_command);
        if (flap_.asked_open() && asked < 0.5 && !usable(Channel::flap_position) && !flap_stands_in()) {
            command_fell_unseen_ = true;
            command_fell_s_ = time_s;
        }
        flap_.command(time_s, asked);
        flap_stand_in_.command(time_s, asked > 0.5);
    }
    if (has(admitted, Channel::flap_position)) {
        flap_stood_in_ = false;
        const double position = frame.get(Channel::flap_position);
        flap_stand_in_.learn(time_s, position);
        follow_flap(time_s, position);
        judge_flap_zero();
    } else if (flap_stands_in()) {
        flap_stood_in_ = true;
        follow_flap(time_s, flap_stand_in_.position(time_s));
    }
}

// A zero that has moved is told, and taken out; one that has moved far is not to be trusted.
void Engine::judge_flap_zero() {
    constexpr double kMoved = 0.05, kMovedFar = 0.25;
    ChannelHealth& h = intake_.health()[index(Channel::flap_position)];
    const double zero = std::abs(flap_.zero());
    if (zero > kMovedFar) {
        h.fault = Fault::none;
        distrust(Channel::flap_position, Fault::drifting);
    } else if (zero > kMoved && h.trust == Trust::good && h.fault == Fault::none) {
        h.fault = Fault::drifting;
        h.since_ns = time_ns_;
    } else if (zero < 0.5 * kMoved && h.trust == Trust::good && h.fault == Fault::drifting) {
        h.fault = Fault::none;
    }
}

bool Engine::flap_stands_in() const {
    return intake_.health()[index(Channel::flap_position)].samples > 0 && !usable(Channel::flap_position) &&
           usable(Channel::flap_command) && flap_stand_in_.known();
}

void Engine::follow_flap(double time_s, double position) {
    const FlapMotion::Step step = flap_.position(time_s, position);
    tracker_.flap_moved(time_s, flap_.position_now());
    const double colour = std::max(front_road_.colour(), rear_road_.colour());
    if (step.closing_began) {
        tracker_.end(aero_now(time_s), colour, chassis_.filter(), false);
        tracker_.begin(aero_now(time_s), flap_.time_command_s(), car_.flap_chord_m, chassis_.filter());
    }
    if (step.shut) tracker_.shut(flap_.time_moved_s(), flap_.time_shut_s());
    if (step.reopened || (flap_.phase() == FlapPhase::opening && tracker_.bank().running())) {
        tracker_.end(aero_now(time_s), colour, chassis_.filter(), false);
    }
    if (flap_.phase() == FlapPhase::opening) tracker_.flap_opens(chassis_.filter());
}

void Engine::find_brakes(const Frame& frame, std::uint64_t admitted) {
    const double time_s = frame.time_s();
    std::optional<double> onset;
    if (has(admitted, Channel::brake_pressure))
        onset = brakes_.pressure(time_s, frame.get(Channel::brake_pressure));
    if (!onset && (has(admitted, Channel::accel_x) || (!have_accel_x_ && has(admitted, Channel::speed)))) {
        onset = brakes_.acceleration(time_s, accel_x_mps2_, -drag_n() / mass_kg());
    }
    // At rest, and in slow corners, brakes may be held without a deceleration to show for it.
    if (brakes_.pressure_disagrees() && longitudinal_.speed_mps() > kSlowFrom_mps)
        distrust(Channel::brake_pressure, Fault::disagrees);
    if (!usable(Channel::brake_pressure)) {
        brakes_.pressure_lost();
        reconsider_brake_pressure(frame);
    }
    if (!onset) return;
    const double distance = lap_distance_m_ - (time_s - *onset) * longitudinal_.speed_mps();
    const std::int32_t zone =
        longitudinal_.speed_mps() > kSlowFrom_mps ? zones_.at(distance) : Zones::kUnknown;
    if (command_fell_unseen_ && *onset < command_fell_s_ + kUnseenFor_s) {
        alarms_.push(Alarm{AlarmKind::unknown_at_brakes, frame.time_ns, 0, Channel::flap_position, 0.0, {}});
    }
    command_fell_unseen_ = false;
    tracker_.brakes(*onset, zone, distance, aero_now(time_s));
}

// A pressure that was named is believed again once it has been seen at rest with the brakes off and then high
// with the brakes on.
void Engine::reconsider_brake_pressure(const Frame& frame) {
    constexpr double kRest_pa = 1e5, kAlive_pa = 1e6;
    if (!frame.has(Channel::brake_pressure)) return;
    const double pressure_pa = frame.get(Channel::brake_pressure);
    if (!brakes_.braking()) brake_pressure_rests_ = pressure_pa < kRest_pa;
    if (brakes_.braking() && brake_pressure_rests_ && pressure_pa > kAlive_pa)
        trust_again(Channel::brake_pressure, Fault::disagrees);
}

void Engine::restart_motion(double time_s) {
    const double colour = std::max(front_road_.colour(), rear_road_.colour());
    tracker_.end(aero_now(time_s), colour, chassis_.filter(), true);
    chassis_.restart_motion(front_heights_.dh_m(), rear_heights_.dh_m(), front_heights_.x_m(),
                            rear_heights_.x_m());
    front_road_.restart();
    rear_road_.restart();
    loads_known_ = false;
}

// Channels that a judgement of a closing rests on, as far as they are usable.
std::uint64_t Engine::sources() const {
    std::uint64_t set = 0;
    const auto look = [&](Channel c) { set |= usable(c) ? std::uint64_t{1} << index(c) : 0; };
    for (const Channel c : {Channel::load_fl, Channel::load_fr, Channel::load_rl, Channel::load_rr}) look(c);
    for (const AxleHeights* heights : {&front_heights_, &rear_heights_}) {
        for (std::size_t i = 0; i < heights->count(); ++i) look(heights->sensor(i).channel);
    }
    return set;
}

bool Engine::converged() const {
    const auto& f = chassis_.filter();
    return f.variance(kAreaFront) < square(0.25) && f.variance(kAreaRear) < square(0.25);
}

AeroNow Engine::aero_now(double time_s) const {
    const auto& x = chassis_.filter().x;
    AeroNow now;
    now.time_s = time_s;
    now.speed_mps = longitudinal_.speed_mps();
    now.dynamic_pressure_pa = dynamic_pressure_pa();
    now.front_per_rear = x[kFlapAreaFront] / std::max(x[kFlapAreaRear], 0.1);
    now.rear_area_attached_m2 = chassis_.rear_area_m2(rear_heights_.dh_m());
    now.rear_area_sd_m2 = std::sqrt(chassis_.filter().variance(kAreaRear));
    now.lap = static_cast<std::int32_t>(std::lround(lap_));
    now.reliable = loads_known_ && heights_known_ && stale_ == 0 && converged() && !flap_stood_in_ &&
                   time_s > sources_changed_s_ + kSettleAfterChange_s;
    return now;
}

void Engine::collect() {
    while (const auto alarm = tracker_.take_alarm()) alarms_.push(*alarm);
    while (const auto closure = tracker_.take_closure()) closures_.push(*closure);
}

void Engine::finish() {
    const double colour = std::max(front_road_.colour(), rear_road_.colour());
    tracker_.end(aero_now(static_cast<double>(time_ns_) * 1e-9), colour, chassis_.filter(), false);
    collect();
}

}  // namespace holdfast::core
