// SPDX-License-Identifier: MIT
// The driver: full throttle on straights with the flap open, flap shut and brakes before corners, steady
// speed through them. Times and places scatter from lap to lap.
#pragma once

#include <cstdint>
#include <vector>

#include "firmware_host/car/circuit.hpp"
#include "firmware_host/car/flap.hpp"
#include "firmware_host/car/scenario.hpp"

namespace holdfast::sim {

// What the driver sees and feels.
struct DriverView {
    double time_s = 0.0;
    double speed_mps = 0.0;
    double accel_mps2 = 0.0;
    double lap_distance_m = 0.0;
    int lap = 1;
    double mass_kg = 800.0;
    double resistance_n = 0.0;      // drag, rolling and grade
    double traction_limit_n = 1e4;  // of the driven tyres
};

struct Controls {
    double throttle = 0.0;       // 0..1
    double drive_force_n = 0.0;  // at the road; negative by the engine's braking
    double brake_pressure_pa = 0.0;
    bool flap_open = false;
};

class Driver {
  public:
    Driver(const Scenario& scenario, const Circuit& circuit, const Capability& car);

    void step(const DriverView& view, double dt_s);

    [[nodiscard]] const Controls& controls() const { return controls_; }
    // How the flap closes when its command falls next, or did fall last.
    [[nodiscard]] const Closing& closing() const { return closing_; }
    [[nodiscard]] int zone_ahead(double lap_distance_m) const { return plan_.zone_ahead(lap_distance_m); }

  private:
    enum class Doing : std::uint8_t { rolling_out, full_throttle, lifting, braking, cornering };

    void decide(const DriverView& view);
    void plan_straight(const DriverView& view);
    void draw_closing(int zone);
    [[nodiscard]] const PlannedClosing* planned(int lap, int zone) const;
    [[nodiscard]] double limit_mps(const DriverView& view) const;
    [[nodiscard]] double planned_braking_mps2(const DriverView& view) const;
    // Whether the speed expected in so many seconds is over the plan there; and whether none is until then.
    [[nodiscard]] bool brakes_within(double seconds, const DriverView& view) const;
    [[nodiscard]] bool clear_for(double seconds, const DriverView& view) const;
    void work_flap(const DriverView& view, double dt_s);
    void work_throttle(const DriverView& view, double dt_s);
    void work_brakes(const DriverView& view, double dt_s);
    void shift(const DriverView& view);
    [[nodiscard]] double full_drive_n(const DriverView& view) const;

    DriverParameters parameters_;
    FlapParameters flap_;
    std::vector<PlannedClosing> planned_;
    const Circuit& circuit_;
    SpeedPlan plan_;
    Random random_;
    Random flap_random_;

    Doing doing_ = Doing::rolling_out;
    Controls controls_;
    Closing closing_;
    bool in_corner_ = false;  // now, or since the last braking
    bool keep_shut_ = false;
    bool closed_here_ = false;    // the flap was open on this straight already
    double brake_shift_m_ = 0.0;  // this lap's brake point against the plan's, positive earlier
    double gap_s_ = 0.2;          // flap shut to brake onset
    double flap_wait_s_ = 1.0;
    double full_throttle_s_ = 0.0;
    double braking_s_ = 0.0;
    std::size_t gear_ = 0;
    double shift_until_s_ = -1.0;
};

}  // namespace holdfast::sim
