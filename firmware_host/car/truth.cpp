// SPDX-License-Identifier: MIT
#include "firmware_host/car/truth.hpp"

#include <cmath>
#include <cstdio>
#include <limits>

#include "firmware_host/car/truth_recorder.hpp"

namespace holdfast::sim {
namespace {

constexpr double kUnknown = std::numeric_limits<double>::quiet_NaN();
constexpr double kBrakesWithinS = 3.0;  // later brakes belong to something else

// One cell of a CSV line with the comma before it; empty for NaN.
std::string cell(double value, int decimals) {
    if (std::isnan(value)) return ",";
    char text[48];
    std::snprintf(text, sizeof text, ",%.*f", decimals, value);
    return text;
}

}  // namespace

void TruthRecorder::sample(const TruthInstant& now) {
    samples_.push_back({now.time_s, now.air_speed_mps, now.air_density_kgpm3, now.areas.front_m2,
                        now.areas.rear_m2, now.areas.drag_m2, now.attached, now.flap_position,
                        now.speed_mps});
}

void TruthRecorder::watch(const TruthInstant& now) {
    if (before_.flap_command && !now.flap_command) begin(now);
    if (open_) {
        if (!shut_ && now.flap_position == before_.flap_position) moving_since_s_ = now.time_s;  // not yet
        if (!shut_ && now.flap_position <= 0.0) {
            shut_ = true;
            const double chord_s = flap_.chord_m / now.air_speed_mps;
            closure_.time_closed_s = now.time_s;
            closure_.closing_time_s = now.time_s - moving_since_s_;
            closure_.dead_s = flap_.dead_chords * chord_s;
            closure_.tau_s = now.closing.tau_chords * chord_s;
        }
        regain(now, 0.90, closure_.t90_s);
        regain(now, 0.95, closure_.t95_s);
        brakes(now);
        const bool waited = shut_ && now.time_s > closure_.time_closed_s + kBrakesWithinS;
        const bool opens_again = now.flap_command && !before_.flap_command;
        if (opens_again || waited) finish();
    }
    before_ = now;
}

void TruthRecorder::begin(const TruthInstant& now) {
    finish();
    open_ = true;
    shut_ = false;
    moving_since_s_ = now.time_s;
    closure_ = TruthClosure{};
    closure_.number = ++count_;
    closure_.lap = now.lap;
    closure_.time_command_s = now.time_s;
    closure_.speed_mps = now.speed_mps;
    closure_.slow = now.closing.slow;
    closure_.plateau = now.closing.plateau;
    closure_.time_closed_s = closure_.t90_s = closure_.t95_s = kUnknown;
    closure_.time_brake_s = closure_.attached_at_brake = kUnknown;
    closure_.missing_at_brake_n = closure_.missing_share = kUnknown;
}

// Instant at which the flow's share passes `share`, between the two steps around it. Kept as time since the
// log began until the closing is over.
void TruthRecorder::regain(const TruthInstant& now, double share, double& time_s) const {
    if (!std::isnan(time_s) || now.attached < share || before_.attached >= share) return;
    const double part = (share - before_.attached) / (now.attached - before_.attached);
    time_s = before_.time_s + part * (now.time_s - before_.time_s);
}

void TruthRecorder::brakes(const TruthInstant& now) {
    if (!std::isnan(closure_.time_brake_s) || now.brake_pressure_pa <= 0.0) return;
    const double pressure_pa = 0.5 * now.air_density_kgpm3 * now.air_speed_mps * now.air_speed_mps;
    const double missing_m2 = flap_.area_m2 * (1.0 - now.attached);
    closure_.time_brake_s = now.time_s;
    closure_.zone = now.zone_ahead;
    closure_.attached_at_brake = now.attached;
    closure_.missing_at_brake_n = pressure_pa * missing_m2;
    closure_.missing_share = missing_m2 / (now.areas.rear_m2 + missing_m2);
}

void TruthRecorder::finish() {
    if (!open_) return;
    open_ = false;
    if (!shut_) return;  // opened again, or over, before it was ever shut: no closing
    closure_.t90_s -= closure_.time_closed_s;
    closure_.t95_s -= closure_.time_closed_s;
    closures_.push_back(closure_);
}

void write_truth_csv(std::ostream& out, const std::vector<TruthSample>& truth) {
    out << "t,airspeed,rho,cla_front,cla_rear,cda,attached,flap,speed\n";
    for (const TruthSample& s : truth) {
        out << cell(s.time_s, 3).substr(1) << cell(s.air_speed_mps, 3) << cell(s.air_density_kgpm3, 5)
            << cell(s.cla_front_m2, 4) << cell(s.cla_rear_m2, 4) << cell(s.cda_m2, 4) << cell(s.attached, 4)
            << cell(s.flap_position, 3) << cell(s.speed_mps, 3) << '\n';
    }
}

void write_truth_closures_csv(std::ostream& out, const std::vector<TruthClosure>& closures) {
    out << "closure,lap,zone,t_command,t_closed,speed,closing_time,dead,tau,t90_after_closed,t95_after_"
           "closed,"
           "t_brake,attached_at_brake,missing_at_brake_N,missing_at_brake_frac_rear,slow,failed,plateau\n";
    for (const TruthClosure& c : closures) {
        out << c.number << ',' << c.lap << ',' << c.zone << cell(c.time_command_s, 4)
            << cell(c.time_closed_s, 4) << cell(c.speed_mps, 3) << cell(c.closing_time_s, 4)
            << cell(c.dead_s, 4) << cell(c.tau_s, 4) << cell(c.t90_s, 4) << cell(c.t95_s, 4)
            << cell(c.time_brake_s, 4) << cell(c.attached_at_brake, 4) << cell(c.missing_at_brake_n, 1)
            << cell(c.missing_share, 4) << ',' << (c.slow ? 1 : 0) << ',' << (c.plateau < 1.0 ? 1 : 0)
            << cell(c.plateau, 3) << '\n';
    }
}

}  // namespace holdfast::sim
