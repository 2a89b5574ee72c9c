// SPDX-License-Identifier: MIT
// The truth behind an outing, for judging an estimator. Written beside the recording as truth.csv and
// truth_closures.csv.
#pragma once

#include <cstdint>
#include <ostream>
#include <vector>

namespace holdfast::sim {

// At 50 Hz. Areas refer to air speed: downforce = 1/2 density air_speed^2 area.
struct TruthSample {
    double time_s = 0.0;
    double air_speed_mps = 0.0;
    double air_density_kgpm3 = 0.0;
    double cla_front_m2 = 0.0;
    double cla_rear_m2 = 0.0;
    double cda_m2 = 0.0;
    double attached = 1.0;  // share of the flap's downforce that is there
    double flap_position = 0.0;
    double speed_mps = 0.0;  // over ground
};

// One closing. NaN: did not happen (no brakes within 3 s; the flow did not come back that far before the flap
// opened again or the outing ended).
struct TruthClosure {
    int number = 0;
    int lap = 0;
    int zone = 0;  // braking zone by lap distance, from 1; 0: no braking followed
    double time_command_s = 0.0;
    double time_closed_s = 0.0;
    double speed_mps = 0.0;       // over ground, at the command
    double closing_time_s = 0.0;  // first movement to shut
    double dead_s = 0.0;
    double tau_s = 0.0;  // time constant at the speed of time_closed
    double t90_s = 0.0;  // after time_closed, of the whole flap
    double t95_s = 0.0;
    double time_brake_s = 0.0;  // first rise of the brake pressure
    double attached_at_brake = 0.0;
    double missing_at_brake_n = 0.0;
    double missing_share = 0.0;  // over the rear downforce with attached flow
    bool slow = false;           // drawn or planned slower than usual
    double plateau = 1.0;        // below 1: settles short of whole
};

void write_truth_csv(std::ostream& out, const std::vector<TruthSample>& truth);
void write_truth_closures_csv(std::ostream& out, const std::vector<TruthClosure>& closures);

}  // namespace holdfast::sim
