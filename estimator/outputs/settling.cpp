// SPDX-License-Identifier: MIT
#include "estimator/outputs/settling.hpp"

#include <cmath>

#include "estimator/core/chassis_filter.hpp"
#include "estimator/outputs/text.hpp"

namespace holdfast::outputs {
namespace {

constexpr double kLoadSensorsSd_n = 60.0;  // zero of an axle's two load sensors; common practice, no source
constexpr double kOneNewtonPerMillimetre = 1e3;
constexpr double kPercent = 0.01;

std::string with_sd(const core::Quantity& q, double unit_si) {
    const double sd = q.sd / unit_si;
    const int decimals = sd >= 2.0 ? 0 : 1;
    return fixed(q.value / unit_si, decimals) + " ± " + fixed(sd, decimals);
}

void compare_axle(bool rear, const core::Car& car, const core::LearnedAxle& learned,
                  std::vector<Comparison>& out) {
    const std::string name = rear ? "rear" : "front";
    const core::Axle& axle = rear ? car.rear : car.front;
    const core::ChassisConstants constants(car);
    if (learned.rate_npm) {
        if (const auto rate = wheel_rate_npm(*learned.rate_npm, axle.tyre_rate_npm))
            out.push_back({.what = name + " wheel_rate",
                           .unit = "N/mm",
                           .unit_si = kOneNewtonPerMillimetre,
                           .file = axle.wheel_rate_npm,
                           .data = *rate,
                           .table = name,
                           .key = "wheel_rate",
                           .why_not = {}});
    }
    const double weight_sd_n = rear ? constants.weight_sd_rear_n : constants.weight_sd_front_n;
    out.push_back({.what = name + " load offset",
                   .unit = "N",
                   .unit_si = 1.0,
                   .file = {0.0, std::hypot(weight_sd_n, kLoadSensorsSd_n)},
                   .data = learned.load_offset_n,
                   .table = {},
                   .key = {},
                   .why_not = "the zero of the load sensors and the weight of the car look the same to a car "
                              "that drives: weigh it, or zero the sensors"});
    out.push_back(
        {.what = name + " longitudinal load transfer, beyond the file's",
         .unit = "%",
         .unit_si = kPercent,
         .file = {0.0, std::hypot(car.cg_height_m.sd / car.cg_height_m.value, axle.anti_brake_share.sd)},
         .data = learned.transfer,
         .table = {},
         .key = {},
         .why_not = "cg_height, anti-dive, anti-lift and the wheels' masses share it, and no "
                    "outing tells them apart"});
}

}  // namespace

double Comparison::apart() const {
    return std::abs(file.value - data.value) / std::hypot(file.sd, data.sd);
}

std::optional<core::Quantity> wheel_rate_npm(const core::Quantity& series_npm,
                                             const core::Quantity& tyre_npm) {
    const double corner = 0.5 * series_npm.value;
    const double beyond = tyre_npm.value - corner;
    if (corner <= 0.0 || beyond <= 0.0) return std::nullopt;
    const double by_series = tyre_npm.value / beyond;  // squared: d(wheel)/d(corner)
    const double by_tyre = corner / beyond;            // squared: -d(wheel)/d(tyre)
    return core::Quantity{corner * by_series, std::hypot(by_series * by_series * 0.5 * series_npm.sd,
                                                         by_tyre * by_tyre * tyre_npm.sd)};
}

std::vector<Comparison> compare(const core::Car& car, const core::Learned& learned) {
    std::vector<Comparison> out;
    compare_axle(false, car, learned.front, out);
    compare_axle(true, car, learned.rear, out);
    return out;
}

std::string sentence(const Comparison& c) {
    const std::string line = c.what + ": the file says " + with_sd(c.file, c.unit_si) + " " + c.unit +
                             ", the data say " + with_sd(c.data, c.unit_si) + " " + c.unit + ": " +
                             fixed(c.apart(), 1) + " standard uncertainties apart";
    return c.disagrees() && c.key.empty() ? line + "; " + c.why_not : line;
}

std::vector<session::CarFileChange> proposals(const std::vector<Comparison>& comparisons) {
    std::vector<session::CarFileChange> out;
    for (const Comparison& c : comparisons)
        if (c.disagrees() && !c.key.empty()) out.push_back({c.table, c.key, c.data});
    return out;
}

}  // namespace holdfast::outputs
