// SPDX-License-Identifier: MIT
#include "firmware_host/car/flap.hpp"

#include <algorithm>
#include <cmath>

namespace holdfast::sim {

void Flap::step(bool command_open, const Closing& closing, double air_speed_mps, double dt_s) {
    travel(command_open, closing, dt_s);
    if (command_open_ && position_ > parameters_.detach_position) {
        detach(dt_s);
    } else if (separated_ && !command_open_ && position_ < parameters_.attach_position) {
        reattach(air_speed_mps, dt_s);
    }
}

void Flap::travel(bool command_open, const Closing& closing, double dt_s) {
    if (command_open != command_open_) {
        command_open_ = command_open;
        since_command_s_ = 0.0;
        travel_from_ = position_;
        travel_s_ = command_open ? parameters_.opening_time_s : closing.travel_s;
        if (!command_open) closing_ = closing;
    }
    since_command_s_ += dt_s;
    const double target = command_open_ ? 1.0 : 0.0;
    const double moved = std::clamp((since_command_s_ - parameters_.actuator_delay_s) / travel_s_, 0.0, 1.0);
    const double eased = parameters_.smooth_travel ? moved * moved * (3.0 - 2.0 * moved) : moved;
    position_ = travel_from_ + (target - travel_from_) * eased;
}

void Flap::detach(double dt_s) {
    attached_ *= std::exp(-dt_s / parameters_.opening_detach_tau_s);
    separated_ = true;
    attached_before_ = attached_;
    waited_chords_ = 0.0;
    missing_main_ = 1.0;
    missing_tail_ = 1.0;
}

void Flap::reattach(double air_speed_mps, double dt_s) {
    const double chords = dt_s * std::max(0.0, air_speed_mps) / parameters_.chord_m;
    waited_chords_ += chords;
    if (waited_chords_ < parameters_.dead_chords) return;
    missing_main_ *= std::exp(-chords / closing_.tau_chords);
    missing_tail_ *= std::exp(-chords / (closing_.tau_chords * parameters_.tail_factor));
    attached_ = attached_before_ + (closing_.plateau - attached_before_) * regained();
}

double Flap::regained() const {
    switch (parameters_.shape) {
        case Reattachment::separation_point: {
            const double lift = 0.5 * (1.0 + std::sqrt(1.0 - missing_main_));
            return (lift * lift - 0.25) / 0.75;  // fully separated flow keeps a quarter: counted as nothing
        }
        case Reattachment::slow_tail:
            return 1.0 - (1.0 - parameters_.tail_share) * missing_main_ -
                   parameters_.tail_share * missing_tail_;
        case Reattachment::first_order:
            break;
    }
    return 1.0 - missing_main_;
}

}  // namespace holdfast::sim
