// SPDX-License-Identifier: MIT
#include "estimator/core/flap_motion.hpp"

#include <algorithm>
#include <cmath>

namespace holdfast::core {
namespace {

constexpr double kOpen = 0.85;         // above: open; a closing counts only from there
constexpr double kMoved = 0.06;        // below the open level by so much: moving, whatever the sensor's noise
constexpr double kAtRest = 0.02;       // within so much of an end: at the end
constexpr double kLeftClosed = 0.08;   // above: opening
constexpr double kFitFrom = 0.30;      // the fall below this is fitted to find its end
constexpr double kStillFalls = 0.012;  // lower by so much: still moving, whatever the sensor's noise
constexpr double kStandsFor_s = 0.06;
constexpr double kFitNoise = 0.001;      // scatter below which two fits are equally good
constexpr double kEasesIn = -0.1;        // log of the fits' scatters, eased over straight
constexpr double kActuatorMemory = 0.5;  // weight of the newest closing: an actuator keeps its manner
constexpr double kAtRestAfter_s = 1.5;   // longer than a flap takes to shut
constexpr double kZero_s = 0.3;          // the zero's mean is over so long
constexpr double kMostZero = 0.5;
constexpr double kEndAhead_s = 0.04;

}  // namespace

void FlapMotion::command(double time_s, double value) {
    const double asked = value > 0.5 ? 1.0 : 0.0;
    if (have_command_ && commanded_ > 0.5 && asked < 0.5) {
        command_fell_ = true;
        time_command_s_ = time_s;
    }
    if (asked != commanded_) time_asked_s_ = time_s;
    have_command_ = true;
    commanded_ = asked;
}

void FlapMotion::track_fall(double time_s, double value) {
    if (value > kFitFrom || value < kAtRest) return;
    straight_.add(time_s, value);
    eased_.add(time_s, std::sqrt(value));
}

// Called when the flap is within kAtRest of its end: the end itself may be some milliseconds ahead.
double FlapMotion::end_of_travel_s(double time_s) {
    const bool straight = straight_.falls();
    const bool eased = eased_.falls();
    if (straight && eased) {
        // The root's scatter, at the middle of the fitted part, is 2 sqrt(p) times smaller than the
        // position's own.
        const double eased_scatter = eased_.scatter() * 2.0 * std::sqrt(0.5 * kFitFrom);
        const double better = std::log((eased_scatter + kFitNoise) / (straight_.scatter() + kFitNoise));
        eases_in_ += kActuatorMemory * (better - eases_in_);
    }
    if (!straight && !eased) return time_s;
    const double zero = eased && (!straight || eases_in_ < kEasesIn) ? eased_.zero() : straight_.zero();
    return std::clamp(zero, before_time_s_, time_s + kEndAhead_s);
}

// With a command at hand, what the sensor reads when the flap has long been asked to be shut is its zero.
double FlapMotion::less_zero(double time_s, double read) {
    const bool long_shut = have_command_ && commanded_ < 0.5 && phase_ == FlapPhase::closed &&
                           time_s > time_asked_s_ + kAtRestAfter_s && read < kMostZero;
    if (long_shut) zero_ += std::clamp((time_s - before_time_s_) / kZero_s, 0.0, 1.0) * (read - zero_);
    return read - zero_;
}

FlapMotion::Step FlapMotion::position(double time_s, double read) {
    Step step;
    const double value = less_zero(time_s, read);
    position_ = value;
    const auto begin_closing = [&] {
        phase_ = FlapPhase::closing;
        step.closing_began = true;
        command_fell_ = false;
        straight_ = eased_ = LineFit{};
        lowest_ = value;
        lowest_time_s_ = time_s;
    };
    switch (phase_) {
        case FlapPhase::closed:
            // Not asked to open, it is the sensor that has moved, unless it moves far.
            if (value > std::max(kLeftClosed, lowest_ + kLeftClosed) &&
                (!have_command_ || commanded_ > 0.5 || value > kMostZero))
                phase_ = FlapPhase::opening;
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
            if (value < lowest_ - kStillFalls) {
                lowest_ = value;
                lowest_time_s_ = time_s;
            }
            if (value > kAtRest && value < kFitFrom && time_s > lowest_time_s_ + kStandsFor_s) {
                // It stands, though not at zero: the sensor's zero has moved, and this is shut.
                phase_ = FlapPhase::closed;
                step.shut = true;
                time_moved_s_ = std::max(last_open_time_s_, time_command_s_);
                time_shut_s_ = lowest_time_s_;
            } else if (value <= kAtRest) {
                phase_ = FlapPhase::closed;
                step.shut = true;
                time_moved_s_ = std::max(last_open_time_s_, time_command_s_);
                time_shut_s_ = end_of_travel_s(time_s);
            } else if (have_command_ ? commanded_ > 0.5 && value > 0.5 : value > open_level_ - 0.5 * kMoved) {
                phase_ = FlapPhase::open;
                step.reopened = true;
            }
            break;
    }
    before_time_s_ = time_s;
    return step;
}

}  // namespace holdfast::core
