// SPDX-License-Identifier: MIT
// The engine: one object for live and replay. Feed it frames in the order of their time; read the estimate
// after any step; take closings and alarms as they come. No I/O, no heap, no exceptions, no clock: the same
// frames give the same bits. About 1 MB in size: do not put it on the stack.
#pragma once

#include <cstdint>
#include <optional>

#include "estimator/core/axle_compliance.hpp"
#include "estimator/core/axle_heights.hpp"
#include "estimator/core/axle_loads.hpp"
#include "estimator/core/axle_watch.hpp"
#include "estimator/core/brake_onset.hpp"
#include "estimator/core/car.hpp"
#include "estimator/core/chassis_filter.hpp"
#include "estimator/core/closure_tracker.hpp"
#include "estimator/core/fixed_queue.hpp"
#include "estimator/core/flap_motion.hpp"
#include "estimator/core/flap_stand_in.hpp"
#include "estimator/core/intake.hpp"
#include "estimator/core/learned.hpp"
#include "estimator/core/long_refusal.hpp"
#include "estimator/core/longitudinal_filter.hpp"
#include "estimator/core/pitot_calibration.hpp"
#include "estimator/core/results.hpp"
#include "estimator/core/road_tuning.hpp"
#include "estimator/core/settings.hpp"
#include "estimator/core/slow_snapshot.hpp"
#include "estimator/core/speed_witness.hpp"
#include "estimator/core/zones.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::core {

enum class StepResult : std::uint8_t {
    done,
    repeated,      // time equals the frame before: counted, left out
    out_of_order,  // time before the frame before: counted, left out
};

class Engine {
  public:
    Engine(const Car& car, const Settings& settings);

    [[nodiscard]] StepResult step(const Frame& frame);

    // The input has ended: closings still being judged are judged with what there is.
    void finish();

    [[nodiscard]] const Estimate& estimate();
    [[nodiscard]] const HealthTable& health() const { return intake_.health(); }

    // Oldest closing or alarm not yet taken.
    [[nodiscard]] std::optional<Closure> take_closure() { return closures_.pop(); }
    [[nodiscard]] std::optional<Alarm> take_alarm() { return alarms_.pop(); }
    // Closings or alarms lost because nobody took them; 0 in a sound program.
    [[nodiscard]] std::uint64_t overrun() const { return closures_.overrun() + alarms_.overrun(); }

    // The newest closing as a curve; false where there was none. Costs some milliseconds: for pictures.
    [[nodiscard]] bool regrowth(Regrowth& out) { return tracker_.regrowth(out); }

    // The slow states, once a second of source time and not while a closing is judged; false in between.
    [[nodiscard]] bool take_slow_snapshot(SlowSnapshot& out);

    // What has been learned of the car until now.
    [[nodiscard]] Learned learned() const;

    // For those who look closer: tests and benchmarks.
    [[nodiscard]] const ChassisFilter& chassis() const { return chassis_; }
    [[nodiscard]] const LongitudinalFilter& longitudinal() const { return longitudinal_; }
    [[nodiscard]] const AxleWatch& watch(bool rear) const { return rear ? rear_watch_ : front_watch_; }
    [[nodiscard]] const RoadTuning& front_road() const { return front_road_; }
    [[nodiscard]] const RoadTuning& rear_road() const { return rear_road_; }

  private:
    void note_slow_channels(const Frame& frame, std::uint64_t admitted);
    void step_longitudinal(const Frame& frame, std::uint64_t admitted, double dt_s);
    void follow_heading(const Frame& frame, std::uint64_t admitted, double dt_s);
    void step_flap(const Frame& frame, std::uint64_t admitted);
    void follow_flap(double time_s, double position);
    void judge_flap_zero();
    [[nodiscard]] bool flap_stands_in() const;
    void step_chassis(const Frame& frame, std::uint64_t admitted, double dt_s);
    void fuse_height(AxleHeights& heights, RoadTuning& tuning, ChassisState road, const Frame& frame,
                     std::uint64_t admitted, double roll_rad);
    void stand_in_for_height(AxleHeights& heights, const AxleWatch& watch, ChassisState road, double time_s,
                             const AxleLoads::Load& load);
    void fuse_accel_z(double measured_mps2);
    void fuse_speed(double measured_mps, double since_s);
    void fuse_distance(double time_s, double distance_m);
    void keep_longitudinal(double time_s, bool calm);
    void back_to_older_longitudinal();
    void reconsider_accel_x(const Frame& frame);
    void reconsider_brake_pressure(const Frame& frame);
    void fuse_pitot(double time_s, double measured_pa);
    [[nodiscard]] bool pitot_jumps(double time_s, double beyond_ground_pa, double interval_s);
    void watch_pitot(double elapsed_s);
    [[nodiscard]] bool heard(const Frame& frame, std::uint64_t admitted, Channel c) const;
    void find_brakes(const Frame& frame, std::uint64_t admitted);
    void distrust(Channel c, Fault fault);
    void trust_again(Channel c, Fault fault);
    void watch_sensors(const Frame& frame);
    void watch_needed(std::int64_t time_ns);
    void tell_distrust(std::int64_t time_ns);
    [[nodiscard]] bool usable(Channel c) const;
    void restart_motion(double time_s);
    void collect();
    [[nodiscard]] double dynamic_pressure_pa() const;  // as the filters believe it
    [[nodiscard]] double measured_pressure_pa() const;
    [[nodiscard]] LongitudinalFilter::DragInput drag_input() const;
    [[nodiscard]] double pressure_for_drag_pa() const;  // before the longitudinal filter's own wind
    [[nodiscard]] double drag_n() const;
    [[nodiscard]] double tyre_force_x_n() const;
    [[nodiscard]] double transfer_force_n(double accel_mps2) const;
    [[nodiscard]] double mass_kg() const;
    [[nodiscard]] AeroNow aero_now(double time_s) const;
    [[nodiscard]] std::uint64_t sources() const;
    [[nodiscard]] bool converged() const;

    Car car_;
    Settings settings_;
    Intake intake_;
    LongitudinalFilter longitudinal_, longitudinal_newer_, longitudinal_older_;
    double next_keep_s_ = 0.0;
    ChassisFilter chassis_;
    AxleHeights front_heights_, rear_heights_;
    AxleLoads front_loads_{Channel::load_fl, Channel::load_fr};
    AxleLoads rear_loads_{Channel::load_rl, Channel::load_rr};
    AxleWatch front_watch_, rear_watch_;
    ChassisCompliance compliance_;
    RoadTuning front_road_, rear_road_;
    FlapMotion flap_;
    FlapStandIn flap_stand_in_;
    bool flap_stood_in_ = false;
    BrakeOnset brakes_;
    Zones zones_;
    ClosureTracker tracker_;

    bool started_ = false;
    std::int64_t time_ns_ = 0;
    double start_s_ = 0.0;
    double accel_x_mps2_ = 0.0, accel_y_mps2_ = 0.0;
    double accel_x_sum_ = 0.0, accel_x_count_ = 0.0;  // since the last drag measurement
    double drive_force_n_ = 0.0, drive_force_before_n_ = 0.0;
    bool have_accel_x_ = false;
    double slip_force_n_ = 0.0;  // tyre force along x as the slip follows it
    LongRefusal speed_refusal_{0.4, 0.5}, accel_x_refusal_{1.0, 3.0}, accel_z_refusal_{0.4, 20.0};
    LongRefusal drag_refusal_{0.7, 5.0}, pitot_refusal_{0.3, 5.0}, pitot_return_{0.3, 5.0};
    LongRefusal pitot_drift_{0.3, 5.0};
    // For so long after the pitot was lost the wind is learned anew, and no sensor is named for the air's
    // forces.
    static constexpr double kForcesSettle_s = 20.0;
    double forces_unsure_s_ = -kForcesSettle_s;
    double pitot_level_pa_ = 0.0;   // over the pressure of the ground speed, mean of late
    double pitot_level_s_ = -10.0;  // source time of its newest sample
    double pitot_held_s_ = 0.0;     // for so long its samples have been held back
    bool speed_was_lost_ = false;
    bool refused_by_drift_ = false;         // the speed left its prediction bit by bit
    double speed_innovation_before_ = 0.0;  // mean over the last tenth of a second
    DistanceSpeed distance_speed_;
    SpeedWitness speed_witness_;
    double distance_used_s_ = -10.0;     // source time at which it last stood in for the speed
    double speed_less_slip_mps_ = 0.0;   // newest of the sensor
    bool speed_refused_lately_ = false;  // since the distance's last window
    double last_speed_s_ = 0.0;          // source time at which a speed was last used
    double accel_x_off_mps2_ = 0.0;      // named accelerometer less the speed's derivative
    bool brake_pressure_rests_ = false;  // a named brake pressure reads nothing with the brakes off
    double drag_off_n_ = 0.0;            // mean residual of the drag balance
    double accel_z_level_mps2_ = 0.0;    // mean innovation of late
    double accel_z_held_s_ = 0.0;        // for so long its samples have been held back
    bool accel_z_settled_ = false;
    double accel_z_mean_mps2_ = 0.0;  // mean innovation, samples held back too
    double accel_z_off_s_ = 0.0;      // for so long it has been off
    PitotCalibration pitot_calibration_;
    double pitot_newest_pa_ = 0.0, pitot_off_ = 0.0;
    double speed_before_mps_ = 0.0, speed_time_s_ = 0.0;
    double air_density_kgpm3_;
    double wind_variance_m2ps2_;  // mean square of the wind against the car
    double temperature_k_ = 0.0, pressure_pa_ = 0.0, humidity_ = 0.0;
    double pitot_ratio_ = 1.0;  // measured dynamic pressure over the one of the ground speed
    bool have_pitot_ = false;
    double course_rad_ = 0.0;  // clockwise from north; 0 where the heading is not logged
    bool have_heading_ = false;
    double heading_before_rad_ = 0.0;
    double turned_since_rad_ = 0.0;  // by the lateral acceleration, since the heading last changed
    double lap_ = 0.0, lap_first_ = 0.0, lap_distance_m_;
    bool have_lap_ = false;
    double load_front_n_ = 0.0, load_rear_n_ = 0.0;
    double accel_before_mps2_ = 0.0;  // along x, at the vertical step before
    bool loads_known_ = false;
    double missing_open_ = 0.0;  // base path while no closing is judged
    double next_drift_s_ = 0.0;
    double next_watch_s_ = 0.0, watched_s_ = 0.0;
    double yaw_rate_radps_ = 0.0;
    LongRefusal sides_refusal_{0.1, 3.0}, sides_strain_{1.0, 3.0};
    double accel_y_sum_ = 0.0, accel_y_count_ = 0.0;  // since the watches last judged
    std::uint64_t sources_ = 0;                       // loads and heights that were usable at the last look
    double sources_changed_s_ = -10.0;
    std::uint64_t told_ = 0;            // distrusted channels that an alarm has told of
    bool heights_known_ = true;         // each axle has at least one height or a load to take it from
    bool command_fell_unseen_ = false;  // a closing was asked for while the flap's position was not to be had
    double command_fell_s_ = 0.0;
    std::uint64_t stale_ = 0;  // needed channels that are stale, bits as in Frame::present
    double next_snapshot_s_ = 0.0;
    Estimate estimate_;
    FixedQueue<Closure, 16> closures_;
    FixedQueue<Alarm, 64> alarms_;
};

}  // namespace holdfast::core
