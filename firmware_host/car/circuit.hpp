// SPDX-License-Identifier: MIT
// The circuit's line, and the speed at which a car can be driven round it.
#pragma once

#include <vector>

#include "firmware_host/car/parameters.hpp"

namespace holdfast::sim {

class Circuit {
  public:
    explicit Circuit(const CircuitParameters& parameters);

    [[nodiscard]] double length_m() const { return length_m_; }
    // Lap distance of any distance since the start.
    [[nodiscard]] double lap_distance_m(double distance_m) const;
    // Segment at a lap distance.
    [[nodiscard]] const Segment& segment(double lap_distance_m) const;
    [[nodiscard]] double transition_m() const { return parameters_.transition_m; }
    // Slope (uphill positive), and curvature of the road in the vertical plane (dips positive).
    [[nodiscard]] double grade(double lap_distance_m) const;
    [[nodiscard]] double dip_pm(double lap_distance_m) const;

  private:
    CircuitParameters parameters_;
    std::vector<double> ends_m_;
    double length_m_ = 0.0;
};

// What the speed plan has to know of the car.
struct Capability {
    double mass_kg = 800.0;
    double downforce_area_m2 = 4.0;  // in corners and under the brakes
    double drag_area_m2 = 1.2;       // on straights
    double air_density_kgpm3 = 1.2;
};

// Highest speed at each metre of the lap from which the next corners can still be made, and the braking
// zones.
class SpeedPlan {
  public:
    SpeedPlan(const Circuit& circuit, const DriverParameters& driver, const Capability& car);

    // Also for lap distances beyond the lap's end.
    [[nodiscard]] double limit_mps(double lap_distance_m) const;
    // Deceleration that the brakes are used for at a speed.
    [[nodiscard]] double braking_mps2(double speed_mps) const;
    // Braking zone, from 1 by lap distance, in which a car that brakes next will brake; 0 where there is
    // none.
    [[nodiscard]] int zone_ahead(double lap_distance_m) const;
    // Whether that zone comes only after the line.
    [[nodiscard]] bool zone_is_next_lap(double lap_distance_m) const {
        return zone_end_m_.empty() || lap_distance_m > zone_end_m_.back();
    }
    [[nodiscard]] int zones() const { return static_cast<int>(zone_end_m_.size()); }

  private:
    [[nodiscard]] double corner_speed_mps(double curvature_pm) const;
    void find_zones();

    DriverParameters driver_;
    Capability car_;
    std::vector<double> limit_mps_;   // one a metre
    std::vector<double> zone_end_m_;  // where each zone's braking ends
};

}  // namespace holdfast::sim
