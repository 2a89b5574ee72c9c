// SPDX-License-Identifier: MIT
// One seeded outing of the simulated car through the engine, and what became of it beside the truth.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <vector>

#include "estimator/core/car.hpp"
#include "estimator/core/results.hpp"
#include "firmware_host/car/outing.hpp"
#include "firmware_host/car/parameters.hpp"
#include "firmware_host/car/sensors.hpp"
#include "firmware_host/car/truth.hpp"
#include "tests/bench/accuracy/bound.hpp"

namespace holdfast::bench {

struct ClosurePair {
    sim::TruthClosure truth;
    sim::Reattachment shape = sim::Reattachment::first_order;
    std::optional<core::Closure> found;
    std::optional<TauBound> bound;  // first-order closings that come back whole
};

// Estimate against truth of one area, above 50 m/s once the filter has converged.
struct AreaErrors {
    double count = 0.0;
    double error_sum = 0.0;  // estimate - truth, m^2
    double error2_sum = 0.0;
    double truth_sum = 0.0;
    double inside = 0.0;  // samples whose 95 % band holds the truth
    double z2_sum = 0.0;  // squares of error over stated sd

    void add(const core::Quantity& estimate, double truth);
    [[nodiscard]] double mean_error_share() const;  // of the mean over the outing: relative
};

struct OutingResult {
    std::string scenario;
    std::uint64_t seed = 0;
    std::vector<ClosurePair> closings;
    std::size_t invented = 0;
    AreaErrors cla_front, cla_rear, cda;
    std::vector<core::Alarm> alarms;
    std::vector<sim::Fault> faults;
    double wall_s = 0.0;      // spent in the engine
    double duration_s = 0.0;  // of the outing
};

// The car as its workshop measured it, with the ride heights that the outing has. Throws std::runtime_error.
[[nodiscard]] core::Car workshop_car(const sim::Outing& outing);

// SCENARIO[+FAULT]...: names as sim::make_scenario() takes them, faults as sim::parse_fault().
[[nodiscard]] OutingResult run_outing(const std::string& scenario, std::uint64_t seed);

}  // namespace holdfast::bench
