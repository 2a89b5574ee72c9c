// SPDX-License-Identifier: MIT
// The engine's vertical step: loads in, ride heights and vertical acceleration fused.
#include <algorithm>
#include <cmath>

#include "estimator/core/engine.hpp"
#include "estimator/core/measurements/accel_z.hpp"
#include "estimator/core/measurements/ride_height.hpp"
#include "estimator/core/small_math.hpp"

namespace holdfast::core {
namespace {

constexpr double kGapRestart_s = 0.05;  // a pause that the motion of the car does not survive
constexpr double kHeightLost_s = 0.06;
constexpr double kStandInEvery_s = 0.02;
constexpr double kStandInSd_m = 0.006;  // some 2 mm that keep their sign over several samples
constexpr double kGate = 5.0;           // standard deviations of an innovation
constexpr double kGateClosing = 12.0;  // while a bank runs: candidates far from the base path are to be heard
constexpr double kOpeningLag_chords =
    5.0;  // flow leaves the opening flap so fast; common practice, no source
constexpr double kTransferMemory_s = 0.1;
constexpr double kTransferUnsure = 0.04;
constexpr double kAccelUnsure_mps2 = 0.3, kAccelUnsureBraking_mps2 = 8.0;
constexpr double kWindMemory_s = 120.0;  // over which the strength of the wind against the car is averaged
constexpr double kAccelZLess = 2.0;      // noise of accel_z over its white part
constexpr double kAreaUnsure_m2 = 0.2;
constexpr double kAccelZMean_s = 0.1, kAccelZOff_mps2 = 1.0, kAccelZOffFor_s = 0.3;
constexpr double kAccelZLevel_s = 0.02, kAccelZJumped_s = 0.10;  // kerbs are shorter
constexpr double kAccelZJump = 5.0, kAccelZJump_mps2 = 2.0;      // in noises, and at least

}  // namespace

void Engine::step_chassis(const Frame& frame, std::uint64_t admitted, double dt_s) {
    // With the speed unknown the air forces are: nothing is learned, and the motion begins anew afterwards.
    if ((stale_ & (std::uint64_t{1} << index(Channel::speed))) != 0) {
        speed_was_lost_ = true;
        return;
    }
    if (speed_was_lost_) {
        speed_was_lost_ = false;
        restart_motion(frame.time_s());
    }
    const double time_s = frame.time_s();
    const auto around = [&](const AxleHeights& heights) {
        return AxleLoads::Surroundings{accel_y_mps2_, longitudinal_.speed_mps(), heights.dh_m(),
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
    // As the loads: over the step. At the brakes' onset half a step is 60 N of transfer.
    const double accel_mps2 = first ? accel_x_mps2_ : 0.5 * (accel_before_mps2_ + accel_x_mps2_);
    accel_before_mps2_ = accel_x_mps2_;
    const double accel_density =
        square(chassis_.constants().transfer_per_accel_kg * intake_.noise_sd(Channel::accel_x)) *
        intake_.health()[index(Channel::accel_x)].interval_s;
    in.load_noise_front_n2s = front.noise_density_n2s + accel_density;
    in.load_noise_rear_n2s = rear.noise_density_n2s + accel_density;
    // Links, tyres and pitch do not carry the longitudinal transfer quite as modelled: an error that keeps
    // its sign for a while, in proportion to the transfer.
    const double transfer_n = chassis_.constants().transfer_per_accel_kg * accel_mps2;
    double transfer_density = 2.0 * kTransferMemory_s * square(kTransferUnsure * transfer_n);
    if (!have_accel_x_) {
        // The speed's derivative tells of an acceleration some hundredths of a second late.
        const double unsure = brakes_.braking() ? kAccelUnsureBraking_mps2 : kAccelUnsure_mps2;
        transfer_density +=
            2.0 * kTransferMemory_s * square(chassis_.constants().transfer_per_accel_kg * unsure);
    }
    in.load_noise_front_n2s += transfer_density;
    in.load_noise_rear_n2s += transfer_density;
    in.dynamic_pressure_pa = measured_pressure_pa();
    in.speed_mps = longitudinal_.speed_mps();
    in.course_rad = course_rad_;
    in.air_speed_measured = have_pitot_;
    in.dh_front_m = front_heights_.dh_m();
    in.dh_rear_m = rear_heights_.dh_m();
    in.accel_x_mps2 = longitudinal_.true_accel_mps2(accel_mps2);
    in.transfer_force_n = transfer_force_n(accel_mps2);
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
        const ChassisFilter::Kept kept =
            chassis_.drift(elapsed, have_pitot_, have_heading_ ? 0.0 : turn_radps);
        if (bank.running()) {
            bank.scale(kGust, kept.gust);
            bank.scale(kWindAlong, kept.wind_along);
        }
        longitudinal_.drift(elapsed, 0.002, !have_pitot_ && !have_heading_, turn_radps);
    }
    // Before the heights: what it measures is the balance of the step just predicted.
    if (heard(frame, admitted, Channel::accel_z)) fuse_accel_z(frame.get(Channel::accel_z));
    fuse_height(front_heights_, front_road_, kRoadFront, frame, admitted,
                front_watch_.roll_rad(accel_y_mps2_));
    fuse_height(rear_heights_, rear_road_, kRoadRear, frame, admitted, rear_watch_.roll_rad(accel_y_mps2_));
    stand_in_for_height(front_heights_, front_watch_, kRoadFront, time_s, front);
    stand_in_for_height(rear_heights_, rear_watch_, kRoadRear, time_s, rear);
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
    Innovation<double> innovation{measured_mps2 - AccelZModel::predict(filter.x, step), 0.0};
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
    // The air forces change in some hundredths of a second, a sensor that jumps from one sample to the next:
    // what leaves the innovations' mean of late at once is held back, and named when it lasts.
    const double jump = std::abs(innovation.value - accel_z_level_mps2_);
    const bool jumped = accel_z_settled_ && jump > std::max(kAccelZJump * sd, kAccelZJump_mps2);
    accel_z_held_s_ = jumped ? accel_z_held_s_ + health.interval_s : 0.0;
    if (!jumped)
        accel_z_level_mps2_ +=
            std::min(health.interval_s / kAccelZLevel_s, 1.0) * (innovation.value - accel_z_level_mps2_);
    accel_z_settled_ = true;
    const bool use = health.status.test_ratio <= 1.0 && !jumped;
    health.status.result = use ? FusionResult::used : FusionResult::gated;
    accel_z_mean_mps2_ +=
        std::min(health.interval_s / kAccelZMean_s, 1.0) * (innovation.value - accel_z_mean_mps2_);
    const bool air_known = static_cast<double>(time_ns_) * 1e-9 > forces_unsure_s_ + kForcesSettle_s &&
                           !(have_pitot_ && pitot_calibration_.suspect());
    const bool forces_known = air_known && !closing && usable(Channel::flap_position) &&
                              (missing_open_ < 0.01 || missing_open_ > 0.99);
    const double state_sd = std::sqrt(std::max(innovation.variance - square(kAccelZLess * sd), 0.0));
    const bool off = forces_known && std::abs(accel_z_mean_mps2_) > kAccelZOff_mps2 + 3.0 * state_sd;
    accel_z_off_s_ = off ? accel_z_off_s_ + health.interval_s : 0.0;
    accel_z_refusal_.add(!use || off, health.interval_s);
    const bool wrong = (air_known && accel_z_refusal_.wrong()) || accel_z_held_s_ > kAccelZJumped_s ||
                       accel_z_off_s_ > kAccelZOffFor_s;
    if (wrong && health.trust == Trust::good) {
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

}  // namespace holdfast::core
