// SPDX-License-Identifier: MIT
#include "firmware_host/car/circuit.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace holdfast::sim {
namespace {

constexpr double kNoLimitMps = 150.0;
// The plan keeps a little of the braking in hand, so that a real braking can make up for its slow first
// moments.
constexpr double kBrakingInHand = 0.95;
constexpr double kLeastDropMps = 5.0;  // a smaller drop of speed is no braking zone

}  // namespace

Circuit::Circuit(const CircuitParameters& parameters) : parameters_(parameters) {
    for (const Segment& segment : parameters.segments) {
        length_m_ += segment.length_m;
        ends_m_.push_back(length_m_);
    }
}

double Circuit::lap_distance_m(double distance_m) const {
    return distance_m - length_m_ * std::floor(distance_m / length_m_);
}

const Segment& Circuit::segment(double lap_distance_m) const {
    const auto end = std::upper_bound(ends_m_.begin(), ends_m_.end(), lap_distance_m);
    const auto i = std::min<std::ptrdiff_t>(end - ends_m_.begin(), std::ssize(ends_m_) - 1);
    return parameters_.segments[static_cast<std::size_t>(i)];
}

double Circuit::grade(double lap_distance_m) const {
    const double wave = 2.0 * std::numbers::pi * parameters_.elevation_waves / length_m_;
    return parameters_.elevation_m * wave * std::cos(wave * lap_distance_m);
}

double Circuit::dip_pm(double lap_distance_m) const {
    const double wave = 2.0 * std::numbers::pi * parameters_.elevation_waves / length_m_;
    return -parameters_.elevation_m * wave * wave * std::sin(wave * lap_distance_m);
}

SpeedPlan::SpeedPlan(const Circuit& circuit, const DriverParameters& driver, const Capability& car)
    : driver_(driver), car_(car) {
    const auto metres = static_cast<std::size_t>(std::ceil(circuit.length_m()));
    limit_mps_.resize(metres);
    for (std::size_t i = 0; i < metres; ++i) {
        const double curvature = circuit.segment(static_cast<double>(i)).curvature_pm;
        limit_mps_[i] = curvature == 0.0 ? kNoLimitMps : corner_speed_mps(std::abs(curvature));
    }
    // Backwards from each corner at the braking the car can do; twice round, for the corner after the line.
    for (std::size_t n = 2 * metres; n-- > 0;) {
        const double next = limit_mps_[(n + 1) % metres];
        const double braking = kBrakingInHand * braking_mps2(next);
        double& here = limit_mps_[n % metres];
        here = std::min(here, std::sqrt(next * next + 2.0 * braking));
    }
    find_zones();
}

double SpeedPlan::corner_speed_mps(double curvature_pm) const {
    // v^2 curvature = grip (g + 1/2 rho area v^2 / m), solved for v^2.
    const double per_speed2 =
        driver_.grip * 0.5 * car_.air_density_kgpm3 * car_.downforce_area_m2 / car_.mass_kg;
    const double by_limit = std::sqrt(driver_.lateral_limit_mps2 / curvature_pm);
    if (curvature_pm <= per_speed2) return std::min(kNoLimitMps, by_limit);
    return std::min(
        {kNoLimitMps, by_limit, std::sqrt(driver_.grip * kGravity / (curvature_pm - per_speed2))});
}

double SpeedPlan::braking_mps2(double speed_mps) const {
    const double pressure = 0.5 * car_.air_density_kgpm3 * speed_mps * speed_mps;
    const double by_grip =
        driver_.braking_grip * (kGravity + pressure * car_.downforce_area_m2 / car_.mass_kg);
    return std::min(driver_.braking_limit_mps2, by_grip);
}

double SpeedPlan::limit_mps(double lap_distance_m) const {
    const auto whole = static_cast<std::size_t>(lap_distance_m);
    const double share = lap_distance_m - static_cast<double>(whole);
    const double here = limit_mps_[whole % limit_mps_.size()];
    const double next = limit_mps_[(whole + 1) % limit_mps_.size()];
    return here + share * (next - here);
}

void SpeedPlan::find_zones() {
    // Drive two laps by metres; the second, begun at speed, is the one that counts.
    const auto metres = limit_mps_.size();
    double speed = driver_.start_speed_mps;
    double speed_before_braking = 0.0;
    bool braking = false;
    for (std::size_t n = 0; n < 2 * metres; ++n) {
        const double drag = 0.5 * car_.air_density_kgpm3 * car_.drag_area_m2 * speed * speed;
        const double force = std::min(driver_.drive_limit_n, driver_.power_w / speed) - drag;
        const double free = std::sqrt(std::max(1.0, speed * speed + 2.0 * force / car_.mass_kg));
        const double limit = limit_mps_[(n + 1) % metres];
        const bool held_back = limit < free && limit < speed;
        if (held_back && !braking) speed_before_braking = speed;
        if (braking && !held_back && n >= metres && speed_before_braking - speed > kLeastDropMps) {
            zone_end_m_.push_back(static_cast<double>(n % metres));
        }
        braking = held_back;
        speed = std::min(free, limit);
    }
    std::sort(zone_end_m_.begin(), zone_end_m_.end());
}

int SpeedPlan::zone_ahead(double lap_distance_m) const {
    if (zone_end_m_.empty()) return 0;
    if (zone_is_next_lap(lap_distance_m)) return 1;
    const auto next = std::lower_bound(zone_end_m_.begin(), zone_end_m_.end(), lap_distance_m);
    return static_cast<int>(next - zone_end_m_.begin()) + 1;
}

}  // namespace holdfast::sim
