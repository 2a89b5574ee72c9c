// SPDX-License-Identifier: MIT
// The Cramer-Rao bound of a closing's time constant: no unbiased estimate from the same data has a smaller
// standard deviation. Fisher information of (ln tau, flap size, start) from the whitened innovations of the
// chassis filter: with y = sum of independent innovations v_k of variance S_k,
//   F = sum_k (dv_k/dp) (dv_k/dp)^T / S_k                                                   [fisher]
// (Bar-Shalom, Li & Kirubarajan, Estimation with Applications to Tracking and Navigation, 2001, ch. 2.7;
// innovations form: Schweppe, IEEE Trans. Information Theory IT-11, 1965).
//
// The car, the air and everything else are known exactly; unknown are how the flow comes back, the motion,
// the road and the sensors' noise. Loads enter as forces, as they do in the filter: what exactly known
// springs and dampers would add, and a road that is the same under both axles and on every lap, is not
// counted. Start and flap size are drawn from normals of given standard deviations, so the bound is one over
// them too (Van Trees, Detection, Estimation and Modulation Theory I, 1968, ch. 2.4).
#pragma once

#include "estimator/core/car.hpp"

namespace holdfast::bench {

// One closing of first order, all of it known. Times in seconds after the flap is shut.
struct KnownClosing {
    core::Car car;            // true values; standard uncertainties are not looked at
    double speed_mps = 90.0;  // through the air, until the brakes
    double air_density_kgpm3 = 1.2;
    double flap_rear_m2 = 0.8;   // rear downforce area that comes back
    double flap_front_m2 = 0.0;  // and the front's: negative where the front loses what the rear gains
    double tau_s = 0.035;        // at that speed; the flow counts chords
    double start_s = 0.0;        // nothing comes back before
    double brakes_s = 0.2;
    double braking_mps2 = 0.0;  // deceleration from then on

    double step_s = 0.0025;  // between frames
    // Noise as spectral density, two-sided: variance of a sample times its interval.
    double load_noise_n2s = 0.0;       // an axle's sum of loads
    double height_noise_m2s = 0.0;     // one ride-height sensor
    double accel_z_noise_m2ps3 = 0.0;  // 0: not fitted
    double roughness_m3 = 2e-6;        // of the road under the middle of an axle: ISO 8608 Gd(n0)
    double flap_sd_m2 = 0.04;          // how well an estimator may know the flap's size beforehand
    double start_sd_s = 0.002;         // and the start
};

// Standard deviations of tau, s; infinite where the data say nothing.
struct TauBound {
    double until_brakes_s;
    double until_one_second_s;  // after the flap is shut
};

[[nodiscard]] TauBound tau_bound(const KnownClosing& closing);

}  // namespace holdfast::bench
