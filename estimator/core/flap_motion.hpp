// SPDX-License-Identifier: MIT
// Where the flap is in its cycle, from the position and, where logged, the command: when a closing was asked
// for, when the flap began to move, when it was shut.
#pragma once

#include <cstdint>

#include "estimator/core/line_fit.hpp"

namespace holdfast::core {

enum class FlapPhase : std::uint8_t { closed, opening, open, closing };

class FlapMotion {
  public:
    struct Step {
        bool closing_began = false;  // a closing begins: command, or first movement where there is no command
        bool shut = false;           // the flap is fully closed again
        bool reopened = false;       // a closing was given up before the flap was shut
    };
    void command(double time_s, double value);
    [[nodiscard]] Step position(double time_s, double read);

    [[nodiscard]] FlapPhase phase() const { return phase_; }
    [[nodiscard]] bool asked_open() const { return commanded_ > 0.5; }
    [[nodiscard]] double position_now() const { return position_; }  // the sensor's zero taken out
    [[nodiscard]] double zero() const { return zero_; }  // what it reads when shut; by the command
    [[nodiscard]] double time_command_s() const { return time_command_s_; }  // of the newest closing
    [[nodiscard]] double time_moved_s() const { return time_moved_s_; }
    [[nodiscard]] double time_shut_s() const { return time_shut_s_; }

  private:
    [[nodiscard]] double less_zero(double time_s, double read);
    void track_fall(double time_s, double value);
    [[nodiscard]] double end_of_travel_s(double time_s);

    FlapPhase phase_ = FlapPhase::closed;
    bool have_command_ = false;
    bool command_fell_ = false;
    double commanded_ = 0.0;
    double time_asked_s_ = 0.0;  // when the command last changed
    double zero_ = 0.0;
    double position_ = 0.0;
    double open_level_ = 1.0;
    double last_open_time_s_ = 0.0;  // last instant at which the flap stood at its open level
    double time_command_s_ = 0.0;
    double time_moved_s_ = 0.0;
    double time_shut_s_ = 0.0;
    double before_time_s_ = 0.0;
    double lowest_ = 0.0;         // of the newest closing
    double lowest_time_s_ = 0.0;  // when it last became lower
    // The last part of the fall: straight where the actuator runs into its stop, as the square of the time
    // left where it eases into it. The better fit finds the end of travel.
    LineFit straight_;
    LineFit eased_;          // of the root of the position
    double eases_in_ = 0.0;  // negative: the actuator eases in, from the closings so far
};

}  // namespace holdfast::core
