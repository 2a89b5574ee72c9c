// SPDX-License-Identifier: MIT
#include "estimator/core/engine.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "estimator/core/air.hpp"
#include "estimator/core/measurements/accel_z.hpp"
#include "estimator/core/measurements/ride_height.hpp"

namespace holdfast::core {
namespace {

constexpr double kGravity = 9.80665;    // m/s^2
constexpr double kGapRestart_s = 0.05;  // a pause that the motion of the car does not survive
constexpr double kUnseenFor_s = 3.0;    // brakes within so much of a command belong to it
constexpr double kDriftEvery_s = 0.02;
constexpr double kHeightLost_s = 0.06;
constexpr double kStandInEvery_s = 0.02;
constexpr double kStandInSd_m = 0.006;  // some 2 mm that keep their sign over several samples
constexpr double kGate = 5.0;           // standard deviations of an innovation
constexpr double kGateClosing = 12.0;  // while a bank runs: candidates far from the base path are to be heard
constexpr double kOpeningLag_chords =
    5.0;  // flow leaves the opening flap so fast; common practice, no source
constexpr double kTransferMemory_s = 0.1;
constexpr double kTransferUnsure = 0.03;
constexpr double kPitotSmoothing_s = 0.05;
constexpr double kWindMemory_s = 120.0;  // over which the strength of the wind against the car is averaged
constexpr double kWindSd_mps = 2.0;      // wind that areas carry where air speed is not measured
constexpr double kLoadGainSd = 0.01;     // a load sensor's gain against the weight it was zeroed with
constexpr double kSlipLag_s =
    0.06;  // common practice, no source: tyre relaxation length over speed, wheel inertia
constexpr double kSlipUnsure = 0.010;     // relative speed error for a force of one weight not yet followed
constexpr double kMostAccel_mps2 = 30.0;  // how far off the speed may be after a pause
constexpr double kAccelZLess = 2.0;       // noise of accel_z over its white part
constexpr double kAreaUnsure_m2 = 0.2;
constexpr double kDragWhole =
    0.012;  // mass, accelerometer and drive force together, relative to the drag area
constexpr double kSpeedGate = 8.0;
constexpr double kSpeedReturnGate = 3.0;  // for a speed that was named
constexpr double kSpeedAlone_s = 1.0;     // then a refused speed is believed where there is no accelerometer
constexpr double kSpeedCoasts_s = 20.0;   // the accelerometer alone holds the speed for so long
constexpr double kInnovationMemory_s = 0.1;
constexpr double kReconsider_s = 1.0;
constexpr double kAccelAgrees_mps2 = 1.0;
constexpr double kDragSettle_s = 0.4;     // drive force: mean residual over so long
constexpr double kDragOff = 0.13;         // beyond so many weights it is wrong
constexpr double kPitotOff_n = 300.0;     // and by so much more, for what the loads are off
constexpr double kPitotLearned_s = 40.0;  // before, the areas are not known well enough to judge by
constexpr double kPitotSettle_s = 0.5;
constexpr double kPitotOff = 0.09;      // dynamic pressure against the downforce, relative
constexpr double kNoBrakes_mps2 = 2.5;  // decelerating by no more than this beyond drag: the brakes are off
constexpr double kPitotJumpFrom_mps = 35.0;
constexpr double kPitotJump_mps =
    8.0;  // the air speed leaves the speed over ground by so much at once: not wind
constexpr double kPitotMean_s = 0.4;
constexpr double kDragGate = 4.0;
constexpr double kDragFrom_mps = 30.0;  // below, drag drowns in the other forces
constexpr double kSlowFrom_mps = 20.0;
constexpr double kStraight_mps2 = 3.0;  // lateral acceleration beyond which tyres drag too much

double square(double v) {
    return v * v;
}
bool has(std::uint64_t admitted, Channel c) {
    return ((admitted >> index(c)) & 1U) != 0;
}

}  // namespace

Engine::Engine(const Car& car, const Settings& settings)
    : car_(car),
      settings_(settings),
      longitudinal_(car),
      chassis_(car),
      front_heights_(car, false),
      rear_heights_(car, true),
      front_watch_(car, false),
      rear_watch_(car, true),
      tracker_(settings),
      air_density_kgpm3_(kStandardAirDensity_kgpm3),
      wind_variance_m2ps2_(square(kWindSd_mps)),
      lap_distance_m_(std::numeric_limits<double>::quiet_NaN()) {}

double Engine::mass_kg() const {
    return car_.mass_kg.value - car_.fuel_per_lap_kg.value * std::max(lap_ - lap_first_, 0.0);
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
    return mass_kg() * accel_x_mps2_ + dynamic_pressure_pa() * longitudinal_.filter().x[kDragArea];
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
    if (has(admitted, Channel::heading)) {
        course_rad_ = frame.get(Channel::heading);
        have_heading_ = true;
    }
    find_brakes(frame, admitted);
    step_flap(frame, admitted);
    step_chassis(frame, admitted, step_s);
    watch_sensors(frame);
    tracker_.tick(aero_now(time_s), std::max(front_road_.colour(), rear_road_.colour()), chassis_.filter());
    collect();
    return StepResult::done;
}

void Engine::note_slow_channels(const Frame& frame, std::uint64_t admitted) {
    if (has(admitted, Channel::accel_y)) accel_y_mps2_ = frame.get(Channel::accel_y);
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

void Engine::step_longitudinal(const Frame& frame, std::uint64_t admitted, double dt_s) {
    const double time_s = frame.time_s();
    if (have_accel_x_ && !usable(Channel::accel_x)) {
        have_accel_x_ = false;
        speed_time_s_ = 0.0;
    }
    reconsider_accel_x(frame);
    if (has(admitted, Channel::accel_x)) {
        have_accel_x_ = true;
        accel_x_mps2_ = frame.get(Channel::accel_x);
        accel_x_sum_ += accel_x_mps2_;
        accel_x_count_ += 1.0;
    }
    const double accel_noise = intake_.noise_sd(Channel::accel_x);
    const double density = have_accel_x_
                               ? square(std::max(accel_noise, 0.05)) *
                                     std::max(intake_.health()[index(Channel::accel_x)].interval_s, 1e-3)
                               : 4.0;
    longitudinal_.predict(dt_s, accel_x_mps2_, density + 1e-4);
    if (heard(frame, admitted, Channel::speed)) {
        const double measured = frame.get(Channel::speed);
        const double since_s = std::max(intake_.health()[index(Channel::speed)].interval_s, 1e-3);
        fuse_speed(measured, since_s);
        if (!have_accel_x_) {  // the derivative stands in for the accelerometer
            const double since = time_s - speed_time_s_;
            if (speed_time_s_ > 0.0 && since > 0.0 && since < 0.2) {
                accel_x_mps2_ +=
                    std::min(since / 0.05, 1.0) * ((measured - speed_before_mps_) / since - accel_x_mps2_);
            }
            speed_before_mps_ = measured;
            speed_time_s_ = time_s;
        }
    }
    if (have_pitot_ && !usable(Channel::pitot_pressure)) {
        have_pitot_ = false;
        pitot_ratio_ = 1.0;
        chassis_.wind_is_unknown();
    }
    if (has(admitted, Channel::pitot_pressure)) {
        const double ground = 0.5 * air_density_kgpm3_ * square(longitudinal_.speed_mps());
        const double speed = longitudinal_.speed_mps();
        if (speed > 15.0) {
            const double ratio = frame.get(Channel::pitot_pressure) / ground;
            const double interval =
                std::max(intake_.health()[index(Channel::pitot_pressure)].interval_s, 1e-3);
            if (speed > PitotCalibration::kFrom_mps) {
                const double turn = have_heading_ ? 0.0 : std::abs(accel_y_mps2_) / speed * interval;
                pitot_calibration_.learn(ratio, speed, course_rad_, turn, interval);
            }
            const double share = have_pitot_ ? std::min(interval / kPitotSmoothing_s, 1.0) : 1.0;
            if (!have_pitot_) chassis_.wind_is_measured();
            pitot_ratio_ = std::clamp(
                pitot_ratio_ + share * (ratio / pitot_calibration_.scale() - pitot_ratio_), 0.5, 2.0);
            have_pitot_ = true;
        } else {
            pitot_ratio_ = 1.0;
        }
    }
    if (heard(frame, admitted, Channel::drive_force)) {
        drive_force_before_n_ = drive_force_n_;
        drive_force_n_ = frame.get(Channel::drive_force);
        const bool steady = std::abs(drive_force_n_ - drive_force_before_n_) < 0.03 * mass_kg() * kGravity;
        const bool no_brakes =
            !brakes_.braking() &&
            accel_x_mps2_ >
                -dynamic_pressure_pa() * longitudinal_.filter().x[kDragArea] / mass_kg() - kNoBrakes_mps2;
        if (steady && no_brakes && accel_x_count_ > 0.0 && have_accel_x_ &&
            longitudinal_.speed_mps() > kDragFrom_mps && std::abs(accel_y_mps2_) < kStraight_mps2 &&
            !tracker_.bank().running()) {
            LongitudinalFilter::DragInput in;
            in.drive_force_n = drive_force_n_;
            in.accel_x_mps2 = accel_x_sum_ / accel_x_count_;
            in.dynamic_pressure_pa = dynamic_pressure_pa();
            in.dh_front_m = front_heights_.smooth_dh_m();
            in.dh_rear_m = rear_heights_.smooth_dh_m();
            in.missing = missing_open_ * chassis_.flap_height_factor(in.dh_rear_m);
            in.downforce_n =
                in.dynamic_pressure_pa * (chassis_.filter().x[kAreaFront] + chassis_.filter().x[kAreaRear]);
            in.mass_kg = mass_kg();
            const double accel_sd = std::max(accel_noise, 0.05) / std::sqrt(accel_x_count_);
            in.noise_sd_n = std::hypot(in.mass_kg * accel_sd, std::max(0.10 * in.mass_kg * kGravity, 1.0));
            const double gate = usable(Channel::drive_force) ? kDragGate : 0.0;  // named: only looked at
            const auto innovation = longitudinal_.update_drag(in, gate);
            const double interval = std::max(intake_.health()[index(Channel::drive_force)].interval_s, 1e-3);
            drag_off_n_ += std::min(interval / kDragSettle_s, 1.0) * (innovation.value - drag_off_n_);
            drag_refusal_.add(std::abs(drag_off_n_) > kDragOff * in.mass_kg * kGravity, interval);
            if (drag_refusal_.wrong()) distrust(Channel::drive_force, Fault::jumped);
            if (drag_refusal_.right()) trust_again(Channel::drive_force, Fault::jumped);
        }
        accel_x_sum_ = accel_x_count_ = 0.0;
    }
}

void Engine::fuse_speed(double measured_mps, double since_s) {
    // Slip follows the tyre force with the wheels' and the tyres' lag: while the force changes it is unsure.
    const double weight_n = mass_kg() * kGravity;
    slip_force_n_ += std::min(since_s / kSlipLag_s, 1.0) * (tyre_force_x_n() - slip_force_n_);
    const double unsure = kSlipUnsure * measured_mps * std::abs(tyre_force_x_n() - slip_force_n_) / weight_n;
    const double noise = std::hypot(std::max(intake_.noise_sd(Channel::speed), 0.02), 0.03, unsure);
    const double gate = usable(Channel::speed) ? kSpeedGate : kSpeedReturnGate;
    const auto innovation = longitudinal_.update_speed(measured_mps, slip_force_n_, weight_n, noise, gate);
    MeasurementStatus& status = intake_.health()[index(Channel::speed)].status;
    status.predicted = measured_mps - innovation.value;
    status.innovation = innovation.value;
    status.innovation_variance = innovation.variance;
    status.test_ratio = square(innovation.value / gate) / innovation.variance;
    const bool refused = status.test_ratio > 1.0;
    status.result = refused ? FusionResult::gated : FusionResult::used;
    speed_refusal_.add(refused, since_s);
    if (!refused) {
        last_speed_s_ = static_cast<double>(time_ns_) * 1e-9;
        if (speed_refusal_.right()) trust_again(Channel::speed, Fault::jumped);
    } else {
        ++intake_.health()[index(Channel::speed)].gated;
        // A speed that jumps leaves the prediction at once; an accelerometer that is off leads it away bit by
        // bit.
        if (speed_refusal_.begins())
            refused_by_drift_ = std::abs(speed_innovation_before_) > 0.3 * std::abs(innovation.value);
        if (speed_refusal_.wrong() && refused_by_drift_ && have_accel_x_) {
            distrust(Channel::accel_x, Fault::jumped);
            longitudinal_.restart(measured_mps);
            speed_refusal_.clear();
        } else if (speed_refusal_.wrong()) {
            distrust(Channel::speed, Fault::jumped);
        }
        // Without an accelerometer there is nothing else to believe for long.
        if (!have_accel_x_ && speed_refusal_.refused_s() > kSpeedAlone_s) longitudinal_.restart(measured_mps);
    }
    speed_innovation_before_ +=
        std::min(since_s / kInnovationMemory_s, 1.0) * (innovation.value - speed_innovation_before_);
}

// An accelerometer that was named is held against the speed's derivative until it agrees again.
void Engine::reconsider_accel_x(const Frame& frame) {
    const ChannelHealth& h = intake_.health()[index(Channel::accel_x)];
    if (h.trust != Trust::distrusted || h.fault != Fault::jumped || !frame.has(Channel::accel_x)) return;
    const double off = frame.get(Channel::accel_x) - accel_x_mps2_;
    if (!std::isfinite(off)) return;
    accel_x_off_mps2_ += std::min(h.interval_s / kReconsider_s, 1.0) * (off - accel_x_off_mps2_);
    accel_x_refusal_.add(std::abs(accel_x_off_mps2_) > kAccelAgrees_mps2, h.interval_s);
    if (accel_x_refusal_.right()) trust_again(Channel::accel_x, Fault::jumped);
}

void Engine::find_brakes(const Frame& frame, std::uint64_t admitted) {
    const double time_s = frame.time_s();
    std::optional<double> onset;
    if (has(admitted, Channel::brake_pressure))
        onset = brakes_.pressure(time_s, frame.get(Channel::brake_pressure));
    if (!onset && (has(admitted, Channel::accel_x) || (!have_accel_x_ && has(admitted, Channel::speed)))) {
        const double drag = dynamic_pressure_pa() * longitudinal_.filter().x[kDragArea];
        onset = brakes_.acceleration(time_s, accel_x_mps2_, -drag / mass_kg());
    }
    if (brakes_.pressure_disagrees()) distrust(Channel::brake_pressure, Fault::disagrees);
    constexpr double kAlive_pa = 1e6;
    if (brakes_.braking() && frame.has(Channel::brake_pressure) &&
        frame.get(Channel::brake_pressure) > kAlive_pa) {
        trust_again(Channel::brake_pressure, Fault::disagrees);
    }
    if (!onset) return;
    const double distance = lap_distance_m_ - (time_s - *onset) * longitudinal_.speed_mps();
    const std::int32_t zone =
        longitudinal_.speed_mps() > kSlowFrom_mps ? zones_.at(distance) : Zones::kUnknown;
    if (command_fell_unseen_ && *onset < command_fell_s_ + kUnseenFor_s) {
        alarms_.push(Alarm{AlarmKind::unknown_at_brakes, frame.time_ns, 0, Channel::flap_position, 0.0, {}});
    }
    command_fell_unseen_ = false;
    tracker_.brakes(*onset, zone, distance, aero_now(time_s), chassis_.filter());
}

void Engine::step_flap(const Frame& frame, std::uint64_t admitted) {
    const double time_s = frame.time_s();
    if (has(admitted, Channel::flap_command)) {
        const double asked = frame.get(Channel::flap_command);
        if (flap_.asked_open() && asked < 0.5 && !usable(Channel::flap_position)) {
            command_fell_unseen_ = true;
            command_fell_s_ = time_s;
        }
        flap_.command(time_s, asked);
    }
    if (!has(admitted, Channel::flap_position)) return;
    const FlapMotion::Step step = flap_.position(time_s, frame.get(Channel::flap_position));
    tracker_.flap_moved(time_s, frame.get(Channel::flap_position));
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

void Engine::step_chassis(const Frame& frame, std::uint64_t admitted, double dt_s) {
    const double time_s = frame.time_s();
    const auto around = [&](const AxleHeights& heights) {
        return AxleLoads::Surroundings{accel_y_mps2_, longitudinal_.speed_mps(), heights.smooth_dh_m(),
                                       heights.age_s(time_s) < settings_.stale_s};
    };
    const AxleLoads::Load front =
        front_loads_.take(frame, admitted, intake_, front_watch_, around(front_heights_));
    const AxleLoads::Load rear =
        rear_loads_.take(frame, admitted, intake_, rear_watch_, around(rear_heights_));
    const bool first = !loads_known_;
    loads_known_ = front.known && rear.known;
    ReattachmentBank& bank = tracker_.bank();

    ChassisInput in;
    in.dt_s = dt_s;
    in.load_front_n = first ? front.sum_n : 0.5 * (load_front_n_ + front.sum_n);
    in.load_rear_n = first ? rear.sum_n : 0.5 * (load_rear_n_ + rear.sum_n);
    load_front_n_ = front.sum_n;
    load_rear_n_ = rear.sum_n;
    const double accel_density =
        square(chassis_.constants().transfer_per_accel_kg * intake_.noise_sd(Channel::accel_x)) *
        intake_.health()[index(Channel::accel_x)].interval_s;
    in.load_noise_front_n2s = front.noise_density_n2s + accel_density;
    in.load_noise_rear_n2s = rear.noise_density_n2s + accel_density;
    // Links, tyres and pitch do not carry the longitudinal transfer quite as modelled: an error that keeps
    // its sign for a while, in proportion to the transfer.
    const double transfer_n = chassis_.constants().transfer_per_accel_kg * accel_x_mps2_;
    const double transfer_density = 2.0 * kTransferMemory_s * square(kTransferUnsure * transfer_n);
    in.load_noise_front_n2s += transfer_density;
    in.load_noise_rear_n2s += transfer_density;
    in.dynamic_pressure_pa = measured_pressure_pa();
    in.speed_mps = longitudinal_.speed_mps();
    in.course_rad = course_rad_;
    in.air_speed_measured = have_pitot_;
    in.dh_front_m = front_heights_.smooth_dh_m();
    in.dh_rear_m = rear_heights_.smooth_dh_m();
    in.accel_x_mps2 = longitudinal_.true_accel_mps2(accel_x_mps2_);
    in.tyre_force_x_n = tyre_force_x_n();
    in.fuel_burnt_kg = car_.mass_kg.value - mass_kg();
    in.road_front_m2ps = front_road_.density_m2ps(longitudinal_.speed_mps());
    in.road_rear_m2ps = rear_road_.density_m2ps(longitudinal_.speed_mps());
    if (bank.running()) {
        in.missing = bank.advance(time_s - 0.5 * dt_s, dt_s, flap_.position_now());
        missing_open_ = 1.0;
    } else {
        const double lag_s =
            kOpeningLag_chords * car_.flap_chord_m / std::max(longitudinal_.speed_mps(), 10.0);
        if (flap_.phase() == FlapPhase::closed) {
            missing_open_ = 0.0;
        } else {
            const double target = std::clamp(flap_.position_now(), 0.0, 1.0);
            const double before = missing_open_;
            missing_open_ += (1.0 - std::exp(-dt_s / lag_s)) * (target - missing_open_);
            // How the flow leaves is not modelled beyond this lag: half the change is taken as uncertain
            // force.
            const double unsure = 0.5 * std::abs(missing_open_ - before) * in.dynamic_pressure_pa *
                                  chassis_.filter().x[kFlapAreaRear];
            if (dt_s > 0.0) in.load_noise_rear_n2s += square(unsure) * 0.02 / std::max(dt_s, 1e-3) * 4.0;
        }
        in.missing = missing_open_;
    }
    chassis_.predict(in);
    if (bank.running()) bank.propagate(chassis_.last_step());
    if (time_s >= next_drift_s_) {
        const double elapsed = kDriftEvery_s + std::min(time_s - next_drift_s_, kGapRestart_s);
        next_drift_s_ = time_s + kDriftEvery_s;
        const double turn_radps = std::abs(accel_y_mps2_) / std::max(longitudinal_.speed_mps(), 10.0);
        wind_variance_m2ps2_ +=
            elapsed / kWindMemory_s * (square(chassis_.headwind_mps()) - wind_variance_m2ps2_);
        chassis_.drift(elapsed, have_pitot_, have_heading_ ? 0.0 : turn_radps);
        longitudinal_.drift(elapsed, 0.002);
    }
    fuse_height(front_heights_, front_road_, kRoadFront, frame, admitted,
                front_watch_.roll_rad(accel_y_mps2_));
    fuse_height(rear_heights_, rear_road_, kRoadRear, frame, admitted, rear_watch_.roll_rad(accel_y_mps2_));
    stand_in_for_height(front_heights_, front_watch_, kRoadFront, time_s, front);
    stand_in_for_height(rear_heights_, rear_watch_, kRoadRear, time_s, rear);
    if (heard(frame, admitted, Channel::accel_z)) fuse_accel_z(frame.get(Channel::accel_z));
}

void Engine::fuse_height(AxleHeights& heights, RoadTuning& tuning, ChassisState road, const Frame& frame,
                         std::uint64_t admitted, double roll_rad) {
    const auto height = heights.take(frame, admitted, roll_rad);
    if (!height) return;
    auto& filter = chassis_.filter();
    const RideHeightModel model{heights.x_m() + chassis_.constants().cg_to_front_m, road};
    const auto h = model.J_height_state();
    const double noise = square(heights.noise_sd_m(intake_)) * height->noise_gain * tuning.noise_factor();
    Innovation<double> innovation{height->dh_m - model.predict(filter.x), 0.0};
    innovation.variance = filter.expect(h, noise);
    const bool closing = tracker_.bank().running();
    const double gate = closing ? kGateClosing : kGate;
    const double ratio = square(innovation.value) / (square(gate) * innovation.variance);
    const bool use = ratio <= 1.0;
    for (std::size_t i = 0; i < heights.count(); ++i) {
        const std::size_t slot = index(heights.sensor(i).channel);
        if (((admitted >> slot) & 1U) == 0) continue;
        ChannelHealth& health = intake_.health()[slot];
        health.status.predicted = health.status.value - innovation.value;
        health.status.innovation = innovation.value;
        health.status.innovation_variance = innovation.variance;
        health.status.test_ratio = ratio;
        health.status.result = use ? FusionResult::used : FusionResult::gated;
        if (!use) ++health.gated;
    }
    if (!use) {
        // The road may have jumped (a kerb): its uncertainty grows until the heights are heard again.
        filter.add_noise(road, square(0.002));
        return;
    }
    const double flap_reaction = closing ? [&] {
        double sum = 0.0;
        for (std::size_t i = 0; i < kFlapAreaRear; ++i) sum += h[i] * filter.column(kFlapAreaRear)[i];
        return sum;
    }() : 0.0;
    filter.apply(innovation.value);
    if (closing) {
        tracker_.bank().weigh(h, filter.gain(), innovation, flap_reaction, 0.0);
    } else if (longitudinal_.speed_mps() > 10.0) {
        const double interval = std::max(intake_.health()[index(heights.sensor(0).channel)].interval_s, 1e-4);
        tuning.learn(innovation.value, innovation.variance, interval);
    }
}

// An axle whose ride heights are all lost has a height all the same: the one that its load makes.
void Engine::stand_in_for_height(AxleHeights& heights, const AxleWatch& watch, ChassisState road,
                                 double time_s, const AxleLoads::Load& load) {
    if (heights.age_s(time_s) < kHeightLost_s || time_s < heights.stood_in_until_s() + kStandInEvery_s)
        return;
    const double dh = watch.height_from_load_m(load.sum_n, longitudinal_.speed_mps());
    heights.stand_in(dh, time_s);
    auto& filter = chassis_.filter();
    const RideHeightModel model{heights.x_m() + chassis_.constants().cg_to_front_m, road};
    (void)filter.expect(model.J_height_state(), square(kStandInSd_m));
    if (tracker_.bank().running()) return;  // a closing is not judged by it
    filter.apply(dh - model.predict(filter.x));
}

void Engine::fuse_accel_z(double measured_mps2) {
    auto& filter = chassis_.filter();
    const ChassisStep& step = chassis_.last_step();
    const auto h = AccelZModel::J_accel_state(step);
    const double sd = std::max(intake_.noise_sd(Channel::accel_z), 0.05);
    Innovation<double> innovation{measured_mps2 - AccelZModel::predict(step), 0.0};
    innovation.variance = filter.expect(h, square(kAccelZLess * sd));
    const bool closing = tracker_.bank().running();
    const double gate = closing ? kGateClosing : kGate;
    ChannelHealth& health = intake_.health()[index(Channel::accel_z)];
    health.status.predicted = measured_mps2 - innovation.value;
    health.status.innovation = innovation.value;
    health.status.innovation_variance = innovation.variance;
    // Refused by its own noise: what it is trusted less for is what keeps its sign (offset, vibration).
    health.status.test_ratio = square(innovation.value) /
                               (square(gate) * (innovation.variance - square(kAccelZLess * sd) + square(sd)));
    const bool use = health.status.test_ratio <= 1.0;
    health.status.result = use ? FusionResult::used : FusionResult::gated;
    accel_z_refusal_.add(!use, health.interval_s);
    if (accel_z_refusal_.wrong() && health.trust == Trust::good) {
        distrust(Channel::accel_z, Fault::jumped);
        // What it has led the areas to is forgotten.
        filter.add_noise(kAreaFront, square(kAreaUnsure_m2));
        filter.add_noise(kAreaRear, square(kAreaUnsure_m2));
    }
    if (accel_z_refusal_.right()) trust_again(Channel::accel_z, Fault::jumped);
    if (!use) ++health.gated;
    if (!use || health.trust != Trust::good) return;
    double flap_reaction = 0.0;
    if (closing) {
        for (std::size_t i = 0; i < kFlapAreaRear; ++i)
            flap_reaction += h[i] * filter.column(kFlapAreaRear)[i];
        flap_reaction += h[kFlapAreaRear];
    }
    filter.apply(innovation.value);
    if (closing) {
        tracker_.bank().weigh(h, filter.gain(), innovation, flap_reaction, step.heave_accel_per_missing_area);
    }
}

void Engine::restart_motion(double time_s) {
    const double colour = std::max(front_road_.colour(), rear_road_.colour());
    tracker_.end(aero_now(time_s), colour, chassis_.filter(), true);
    chassis_.restart_motion(front_heights_.smooth_dh_m(), rear_heights_.smooth_dh_m(), front_heights_.x_m(),
                            rear_heights_.x_m());
    front_heights_.restart();
    rear_heights_.restart();
    front_road_.restart();
    rear_road_.restart();
    loads_known_ = false;
}

bool Engine::converged() const {
    const auto& f = chassis_.filter();
    return f.variance(kAreaFront) < square(0.25) && f.variance(kAreaRear) < square(0.25);
}

AeroNow Engine::aero_now(double time_s) const {
    const auto& x = chassis_.filter().x;
    const double dh_rear = rear_heights_.smooth_dh_m();
    AeroNow now;
    now.time_s = time_s;
    now.speed_mps = longitudinal_.speed_mps();
    now.dynamic_pressure_pa = dynamic_pressure_pa();
    now.factor_rear = chassis_.flap_height_factor(dh_rear);
    now.front_per_rear = x[kFlapAreaFront] / std::max(x[kFlapAreaRear], 0.1);
    now.rear_area_attached_m2 = x[kAreaRear] + x[kSlopeRear] * dh_rear;
    now.rear_area_sd_m2 = std::sqrt(chassis_.filter().variance(kAreaRear));
    now.lap = static_cast<std::int32_t>(std::lround(lap_));
    now.reliable = loads_known_ && heights_known_ && stale_ == 0 && converged();
    return now;
}

// A channel named for having jumped is heard on, to notice that it is right again; its filter refuses what is
// wrong.
bool Engine::heard(const Frame& frame, std::uint64_t admitted, Channel c) const {
    if (has(admitted, c)) return true;
    const ChannelHealth& h = intake_.health()[index(c)];
    return h.trust == Trust::distrusted && h.fault == Fault::jumped && frame.has(c) &&
           std::isfinite(frame.get(c));
}

// The pitot against the downforce that the loads show: both go with the square of the same air speed.
void Engine::watch_pitot(double elapsed_s) {
    const ChannelHealth& h = intake_.health()[index(Channel::pitot_pressure)];
    if (h.samples > 100 && longitudinal_.speed_mps() > kPitotJumpFrom_mps) {
        const double ground_pa = 0.5 * air_density_kgpm3_ * square(longitudinal_.speed_mps());
        const double headwind =
            longitudinal_.speed_mps() * (std::sqrt(std::max(pitot_newest_pa_, 0.0) / ground_pa) - 1.0);
        if (pitot_seen_)
            pitot_jump_.add(std::abs(headwind - pitot_headwind_mps_) > kPitotJump_mps, elapsed_s);
        // While it is named, the mean stays what it was: the channel returns when it comes back to it.
        if (!pitot_seen_) pitot_headwind_mps_ = headwind;
        if (!pitot_jump_.wrong())
            pitot_headwind_mps_ += std::min(elapsed_s / kPitotMean_s, 1.0) * (headwind - pitot_headwind_mps_);
        pitot_seen_ = true;
        if (pitot_jump_.wrong()) distrust(Channel::pitot_pressure, Fault::jumped);
    }
    const bool steady = longitudinal_.speed_mps() > 40.0 && !brakes_.braking() &&
                        !tracker_.bank().running() && std::abs(accel_y_mps2_) < 8.0 &&
                        (missing_open_ < 0.01 || missing_open_ > 0.99);
    const bool learned = static_cast<double>(time_ns_) * 1e-9 > start_s_ + kPitotLearned_s;
    if (h.samples == 0 || !steady || !converged() || !learned) return;
    const auto& x = chassis_.filter().x;
    const ChassisConstants& c = chassis_.constants();
    const double measured_n = load_front_n_ + load_rear_n_ - c.weight_front_n - c.weight_rear_n -
                              x[kLoadOffsetFront] - x[kLoadOffsetRear] +
                              kGravity * (car_.mass_kg.value - mass_kg());
    const double area =
        x[kAreaFront] + x[kAreaRear] + x[kSlopeFront] * front_heights_.smooth_dh_m() +
        x[kSlopeRear] * rear_heights_.smooth_dh_m() -
        missing_open_ *
            (x[kFlapAreaFront] + x[kFlapAreaRear] * chassis_.flap_height_factor(rear_heights_.smooth_dh_m()));
    if (measured_n < 1000.0) return;
    const double off = pitot_newest_pa_ / pitot_calibration_.scale() * area / measured_n - 1.0;
    pitot_off_ += std::min(elapsed_s / kPitotSettle_s, 1.0) * (off - pitot_off_);
    const double limit = kPitotOff + kPitotOff_n / measured_n;
    pitot_refusal_.add(std::abs(pitot_off_) > limit || pitot_calibration_.broken(), elapsed_s);
    if (pitot_refusal_.wrong()) distrust(Channel::pitot_pressure, Fault::jumped);
    if (pitot_refusal_.right() && pitot_jump_.right()) trust_again(Channel::pitot_pressure, Fault::jumped);
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
    const bool lateral = accel_y_count_ > 0.0 && usable(Channel::accel_y);
    const double accel_y = accel_y_count_ > 0.0 ? accel_y_sum_ / accel_y_count_ : 0.0;
    accel_y_sum_ = accel_y_count_ = 0.0;
    // Both axles' sides at once: it is the lateral acceleration that both are compared with.
    sides_broken_s_ = lateral && front_watch_.sides_broken() && rear_watch_.sides_broken()
                          ? sides_broken_s_ + elapsed
                          : 0.0;
    if (sides_broken_s_ > 0.1) {
        ChannelHealth& h = health[index(Channel::accel_y)];
        h.trust = Trust::distrusted;
        h.fault = Fault::jumped;
        h.since_ns = frame.time_ns;
    }
    front_watch_.judge(elapsed, frame.time_ns, longitudinal_.speed_mps(), accel_y, lateral, health);
    rear_watch_.judge(elapsed, frame.time_ns, longitudinal_.speed_mps(), accel_y, lateral, health);
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
    watch(Channel::flap_position, early || usable(Channel::flap_position));
    watch(Channel::load_fl, early || front_load || front_height);
    watch(Channel::load_rl, early || rear_load || rear_height);
    heights_known_ = (front_height || front_load) && (rear_height || rear_load);
}

void Engine::tell_distrust(std::int64_t time_ns) {
    for (std::size_t i = 0; i < kChannelCount; ++i) {
        const std::uint64_t bit = std::uint64_t{1} << i;
        const ChannelHealth& h = intake_.health()[i];
        const bool bad = h.trust == Trust::distrusted || h.fault == Fault::noisy;
        if (bad && (told_ & bit) == 0) {
            alarms_.push(Alarm{AlarmKind::sensor_distrusted, time_ns, 0, static_cast<Channel>(i), 1.0, {}});
        }
        told_ = bad ? told_ | bit : told_ & ~bit;
    }
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

const Estimate& Engine::estimate() {
    const auto& filter = chassis_.filter();
    const auto& x = filter.x;
    const bool closing = tracker_.bank().running();
    const double q = std::max(measured_pressure_pa(), 1e-3);
    const double wind_factor = chassis_.wind_factor();
    const double dh_front = front_heights_.smooth_dh_m();
    const double dh_rear = rear_heights_.smooth_dh_m();
    const double factor_rear = chassis_.flap_height_factor(dh_rear);

    Estimate& e = estimate_;
    e.time_ns = time_ns_;
    e.speed_mps = longitudinal_.speed_mps();
    e.air_speed_mps = e.speed_mps * std::sqrt(pitot_ratio_);
    e.air_density_kgpm3 = air_density_kgpm3_;
    e.flap_area_m2 = {x[kFlapAreaRear], std::sqrt(closing ? tracker_.bank().flap_prior_variance()
                                                          : filter.variance(kFlapAreaRear))};
    MissingNow missing;
    if (closing) {
        missing = tracker_.missing();
    } else {
        missing.share = std::max(missing_open_, tracker_.stays_share());
        missing.area_m2 = missing_open_ * x[kFlapAreaRear];
    }
    const double front_ratio = x[kFlapAreaFront] / std::max(x[kFlapAreaRear], 0.1);

    // Areas now as linear forms of the states; the bank's mixture moves them from the base path.
    ChassisFilter::Filter::Vector front{}, rear{};
    front[kAreaFront] = 1.0;
    front[kSlopeFront] = dh_front;
    rear[kAreaRear] = 1.0;
    rear[kSlopeRear] = dh_rear;
    double area_front = x[kAreaFront] + x[kSlopeFront] * dh_front;
    double area_rear = x[kAreaRear] + x[kSlopeRear] * dh_rear;
    if (closing) {
        area_front += tracker_.mean_deviation(kAreaFront, filter) +
                      tracker_.mean_deviation(kSlopeFront, filter) * dh_front;
        area_rear += tracker_.mean_deviation(kAreaRear, filter) +
                     tracker_.mean_deviation(kSlopeRear, filter) * dh_rear;
        area_front -= front_ratio * missing.area_m2;
        area_rear -= factor_rear * missing.area_m2;
    } else {
        front[kFlapAreaFront] = -missing_open_;
        rear[kFlapAreaRear] = -factor_rear * missing_open_;
        area_front += front[kFlapAreaFront] * x[kFlapAreaFront];
        area_rear += rear[kFlapAreaRear] * x[kFlapAreaRear];
    }
    // In the reference that is measured: wind, where it is not, stays in the areas.
    area_front *= wind_factor;
    area_rear *= wind_factor;
    // Wind where the air speed is not measured, and the gain of the load sensors, move an area as a whole.
    const double wind =
        have_pitot_ ? 0.0 : 2.0 * std::sqrt(wind_variance_m2ps2_) / std::max(e.speed_mps, 5.0);
    const double whole = std::hypot(have_pitot_ ? pitot_calibration_.scale_sd() : wind, kLoadGainSd);
    const auto sd_of = [&](const ChassisFilter::Filter::Vector& form, double area, double missing_sd) {
        return std::sqrt(filter.variance_of(form) + square(whole * area) + square(missing_sd));
    };
    e.cla_front_m2 = {area_front, sd_of(front, area_front, front_ratio * missing.area_sd_m2)};
    e.cla_rear_m2 = {area_rear, sd_of(rear, area_rear, factor_rear * missing.area_sd_m2)};
    e.cda_m2 = longitudinal_.drag_area(dh_front, dh_rear, factor_rear * missing.share, missing.share_sd, q,
                                       mass_kg() * kGravity + q * (area_front + area_rear));
    e.cda_m2.value *= wind_factor;
    e.cda_m2.sd = std::hypot(e.cda_m2.sd, std::hypot(wind, kDragWhole) * e.cda_m2.value);
    e.attached = {std::clamp(1.0 - missing.share, 0.0, 1.0), missing.share_sd};
    e.downforce_front_n = {q * area_front, q * e.cla_front_m2.sd};
    e.downforce_rear_n = {q * area_rear, q * e.cla_rear_m2.sd};
    e.drag_n = {q * e.cda_m2.value, q * e.cda_m2.sd};

    std::uint32_t flags = 0;
    if (!converged()) flags |= kNotConverged;
    if (stale_ != 0) flags |= kStale;
    if (!have_pitot_) flags |= kGroundReference;
    if (temperature_k_ == 0.0) flags |= kStandardAir;
    if (intake_.health()[index(Channel::drive_force)].samples == 0) flags |= kDragByCoasting;
    if (e.speed_mps < kSlowFrom_mps) flags |= kSlow;
    if (flap_.phase() != FlapPhase::closed) flags |= kFlapOpen;
    if (closing) flags |= kReattaching;
    for (const ChannelHealth& h : intake_.health()) {
        if (h.trust == Trust::distrusted) flags |= kSensorDistrusted;
    }
    e.flags = flags;
    return e;
}

}  // namespace holdfast::core
