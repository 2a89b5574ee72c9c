// SPDX-License-Identifier: MIT
// The flap and its flow: the actuator's travel, the quick loss of lift when it opens, and the slow return of
// lift after it has closed. Time of the return runs in chords, t V / c.
#pragma once

#include "firmware_host/car/parameters.hpp"

namespace holdfast::sim {

// What is particular to one closing.
struct Closing {
    double travel_s = 0.08;
    double tau_chords = 13.0;
    double plateau = 1.0;  // share of the flap's lift that comes back at all
    bool slow = false;     // drawn or planned slower than usual
};

class Flap {
  public:
    explicit Flap(const FlapParameters& parameters) : parameters_(parameters) {}

    // `closing` is looked at when the command falls.
    void step(bool command_open, const Closing& closing, double air_speed_mps, double dt_s);

    [[nodiscard]] double position() const { return position_; }  // 0 closed, 1 fully open
    [[nodiscard]] double attached() const { return attached_; }  // 0..1
    [[nodiscard]] bool shut() const { return position_ <= 0.0; }

  private:
    void travel(bool command_open, const Closing& closing, double dt_s);
    void detach(double dt_s);
    void reattach(double air_speed_mps, double dt_s);
    [[nodiscard]] double regained() const;

    FlapParameters parameters_;
    Closing closing_;
    bool command_open_ = false;
    double since_command_s_ = 1e9;
    double travel_s_ = 0.08;
    double travel_from_ = 0.0;
    double position_ = 0.0;
    double attached_ = 1.0;
    bool separated_ = false;
    double attached_before_ = 0.0;  // when the return began
    double waited_chords_ = 0.0;    // of the dead time
    double missing_main_ = 1.0;     // exp(-t/tau)
    double missing_tail_ = 1.0;     // the same of the tail
};

}  // namespace holdfast::sim
