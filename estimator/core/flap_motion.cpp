// SPDX-License-Identifier: MIT
#include "estimator/core/flap_motion.hpp"

#include <algorithm>
#include <cmath>

namespace holdfast::core {
namespace {

constexpr double kOpen = 0.85;        // above: open; a closing counts only from there
constexpr double kMoved = 0.06;       // below the open level by so much: moving, whatever the sensor's noise
constexpr double kAtRest = 0.02;      // within so much of an end: at the end
constexpr double kLeftClosed = 0.08;  // above: opening
constexpr double kLineFrom = 0.30;    // the fall below this is fitted by a straight line to find its end

}  // namespace

void FlapMotion::command(double time_s, double value) {
    const double asked = value > 0.5 ? 1.0 : 0.0;
    if (have_command_ && commanded_ > 0.5 && asked < 0.5) {
        command_fell_ = true;
        time_command_s_ = time_s;
    }
    have_command_ = true;
    commanded_ = asked;
}

void FlapMotion::track_fall(double time_s, double value) {
    if (value > kLineFrom || value < kAtRest) return;
    if (line_n_ == 0.0) line_origin_s_ = time_s;
    const double t = time_s - line_origin_s_;
    line_n_ += 1.0;
    line_t_ += t;
    line_p_ += value;
    line_tt_ += t * t;
    line_tp_ += t * value;
}

FlapMotion::Step FlapMotion::position(double time_s, double value) {
    Step step;
    position_ = value;
    const auto begin_closing = [&] {
        phase_ = FlapPhase::closing;
        step.closing_began = true;
        command_fell_ = false;
        line_n_ = line_t_ = line_p_ = line_tt_ = line_tp_ = 0.0;
    };
    switch (phase_) {
        case FlapPhase::closed:
            if (value > kLeftClosed) phase_ = FlapPhase::opening;
            command_fell_ = false;
            break;
        case FlapPhase::opening:
            if (value > kOpen) {
                phase_ = FlapPhase::open;
                open_level_ = value;
                last_open_time_s_ = time_s;
            } else if (value < kAtRest) {
                phase_ = FlapPhase::closed;
            }
            command_fell_ = false;
            break;
        case FlapPhase::open: {
            open_level_ = std::max(open_level_ + 0.02 * (value - open_level_), kOpen);
            const bool moved = value < open_level_ - kMoved;
            if (!moved && value > open_level_ - kAtRest) last_open_time_s_ = time_s;
            if (have_command_ ? command_fell_ : moved) {
                if (!have_command_) time_command_s_ = last_open_time_s_;
                begin_closing();
            } else if (have_command_ && value < 0.5) {  // moved without being asked to
                time_command_s_ = last_open_time_s_;
                begin_closing();
            }
            break;
        }
        case FlapPhase::closing:
            if (value > open_level_ - kAtRest) last_open_time_s_ = time_s;
            track_fall(time_s, value);
            if (value <= kAtRest) {
                phase_ = FlapPhase::closed;
                step.shut = true;
                time_moved_s_ = std::max(last_open_time_s_, time_command_s_);
                // End of travel: where the straight line through the last part of the fall meets zero.
                const double spread = line_n_ * line_tt_ - line_t_ * line_t_;
                time_shut_s_ = time_s;
                if (line_n_ >= 3.0 && spread > 0.0) {
                    const double slope = (line_n_ * line_tp_ - line_t_ * line_p_) / spread;
                    const double zero = (line_t_ - line_p_ / slope) / line_n_;
                    if (slope < 0.0)
                        time_shut_s_ = std::clamp(line_origin_s_ + zero, before_time_s_, time_s + 0.02);
                } else if (before_position_ > value) {
                    const double share = before_position_ / (before_position_ - std::min(value, 0.0));
                    time_shut_s_ = before_time_s_ + share * (time_s - before_time_s_);
                }
            } else if (have_command_ ? commanded_ > 0.5 && value > 0.5
                                     : value > kOpen && before_position_ < value - kMoved) {
                phase_ = FlapPhase::open;
                step.reopened = true;
            }
            break;
    }
    before_time_s_ = time_s;
    before_position_ = value;
    return step;
}

}  // namespace holdfast::core
