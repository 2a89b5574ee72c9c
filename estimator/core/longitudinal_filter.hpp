// SPDX-License-Identifier: MIT
// The filter along the track: true speed (wheel slip taken out) and the drag area, from speed, longitudinal
// acceleration and drive force. Its own small filter: it shares no state with the vertical one, only the
// missing share of the flap and the ride heights enter it as known. MODEL.md [speed], [drag-balance].
#pragma once

#include "estimator/core/car.hpp"
#include "estimator/core/ud_filter.hpp"

namespace holdfast::core {

enum LongitudinalState : std::size_t {
    kSpeed,           // m/s
    kDragArea,        // m^2 at the static ride height, flap closed and flow attached
    kDragFlap,        // m^2 that goes with the flap's flow
    kDragSlopeFront,  // m^2/m with the front ride height
    kDragSlopeRear,   // m^2/m
    kSlipDrive,       // relative excess of measured speed for a drive force of one weight
    kSlipBrake,       // relative lack of measured speed for a brake force of one weight
    kAccelOffset,     // m/s^2, measured minus true
    kAccelGain,       // relative error of the accelerometer's scale
    kDriveGain,       // relative error of the drive force
    kWindUnseen,      // m/s, wind against the car where neither pitot nor course tells of it, else 0
    kLongitudinalCount,
};

class LongitudinalFilter {
  public:
    using Filter = UdFilter<double, kLongitudinalCount>;

    explicit LongitudinalFilter(const Car& car);

    // accel_x measured, m/s^2; noise_variance_rate its two-sided spectral density, (m/s^2)^2 s.
    void predict(double dt_s, double accel_x_mps2, double noise_density);
    // Slow change over elapsed_s. wind_unseen: the wind is this filter's to find, and a turn makes it forget.
    void drift(double elapsed_s, double common_share, bool wind_unseen, double turn_radps);
    void restart(double speed_mps);

    struct DragInput {
        double drive_force_n = 0.0;  // mean over its interval
        double accel_x_mps2 = 0.0;   // as measured, mean over the same
        double speed_mps = 0.0;
        double dynamic_pressure_pa = 0.0;  // before kWindUnseen
        double dh_front_m = 0.0;
        double dh_rear_m = 0.0;
        double missing = 0.0;
        double downforce_n = 0.0;  // what the tyres carry beyond the weight
        double mass_kg = 0.0;
        double noise_sd_n = 0.0;
    };
    // Measured speed against true speed with slip; tyre_force_n along x. Returns the innovation before any
    // update; used only where |innovation| <= gate standard deviations.
    Innovation<double> update_speed(double measured_mps, double tyre_force_n, double weight_n,
                                    double noise_sd_mps, double gate);
    // The true speed itself, without slip: innovation against it, used as above.
    Innovation<double> update_true_speed(double innovation_mps, double noise_sd_mps, double gate);
    // What the slip makes of the true speed: measured over true.
    [[nodiscard]] double slip_factor(double force_in_weights) const {
        return 1.0 + filter_.x[force_in_weights >= 0.0 ? kSlipDrive : kSlipBrake] * force_in_weights;
    }
    // Force balance along x when not braking.
    Innovation<double> update_drag(const DragInput& input, double gate);

    [[nodiscard]] double speed_mps() const { return filter_.x[kSpeed]; }
    // The measured acceleration with the accelerometer's learned errors taken out.
    [[nodiscard]] double true_accel_mps2(double measured_mps2) const {
        return (measured_mps2 - filter_.x[kAccelOffset]) * (1.0 - filter_.x[kAccelGain]);
    }
    // Drag area and its standard uncertainty now, kWindUnseen and rolling resistance's share included.
    [[nodiscard]] Quantity drag_area(double dh_front_m, double dh_rear_m, double missing, double missing_sd,
                                     double dynamic_pressure_pa, double vertical_force_n) const;
    [[nodiscard]] Filter& filter() { return filter_; }
    [[nodiscard]] const Filter& filter() const { return filter_; }
    [[nodiscard]] static Filter::Vector J_speed_state(const Filter::Vector& x, double force_in_weights);
    [[nodiscard]] static Filter::Vector J_drag_state(const Filter::Vector& x, const DragInput& input);
    // Air force along x as the filter believes it.
    [[nodiscard]] double air_force_n(const DragInput& input) const { return air_force_n(filter_.x, input); }
    [[nodiscard]] static double air_force_n(const Filter::Vector& x, const DragInput& input);

  private:
    Filter filter_;
    Quantity rolling_resistance_;
};

}  // namespace holdfast::core
