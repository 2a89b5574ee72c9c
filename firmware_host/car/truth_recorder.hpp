// SPDX-License-Identifier: MIT
// Watches the true car and writes down the truth: samples at 50 Hz, a record for each closing of the flap.
#pragma once

#include <vector>

#include "firmware_host/car/aero.hpp"
#include "firmware_host/car/flap.hpp"
#include "firmware_host/car/truth.hpp"

namespace holdfast::sim {

// The true car at one instant, as the recorder needs it.
struct TruthInstant {
    double time_s = 0.0;
    double speed_mps = 0.0;
    double air_speed_mps = 0.0;
    double air_density_kgpm3 = 0.0;
    Areas areas;
    double attached = 1.0;
    double flap_position = 0.0;
    bool flap_command = false;
    double brake_pressure_pa = 0.0;
    int lap = 1;
    int zone_ahead = 0;
    Closing closing;
};

class TruthRecorder {
  public:
    explicit TruthRecorder(const FlapParameters& flap) : flap_(flap) {}

    void watch(const TruthInstant& now);   // every step
    void sample(const TruthInstant& now);  // at 50 Hz
    void finish();                         // the outing is over

    [[nodiscard]] const std::vector<TruthSample>& samples() const { return samples_; }
    [[nodiscard]] const std::vector<TruthClosure>& closures() const { return closures_; }

  private:
    void begin(const TruthInstant& now);
    void regain(const TruthInstant& now, double share, double& after_closed_s) const;
    void brakes(const TruthInstant& now);

    FlapParameters flap_;
    std::vector<TruthSample> samples_;
    std::vector<TruthClosure> closures_;
    TruthClosure closure_;
    bool open_ = false;  // a closing is being watched
    double moving_since_s_ = 0.0;
    bool shut_ = false;  // its flap has come shut
    TruthInstant before_;
    int count_ = 0;
};

}  // namespace holdfast::sim
