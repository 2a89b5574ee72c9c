// SPDX-License-Identifier: MIT
#include "tests/bench/accuracy/outing_run.hpp"

#include <algorithm>
#include <chrono>
#include <cmath>
#include <cstdio>
#include <filesystem>
#include <fstream>
#include <memory>
#include <stdexcept>

#include "estimator/core/engine.hpp"
#include "estimator/session/bind.hpp"
#include "estimator/session/car_file.hpp"
#include "firmware_host/car/outing.hpp"
#include "tests/bench/accuracy/known_closing.hpp"
#include "tests/temp_folder.hpp"

namespace holdfast::bench {
namespace {

constexpr double kFrom_mps = 50.0;
constexpr double kSettled_s = 30.0;  // areas are judged from here on
constexpr double kMatch_s = 0.15;    // found and true closing lie this near, or are not the same
constexpr std::int64_t kEvery_ns = 20'000'000;

sim::Scenario scenario_with_faults(const std::string& name, std::uint64_t seed) {
    const std::size_t plus = name.find('+');
    sim::Scenario scenario = sim::make_scenario(name.substr(0, plus), seed);
    for (std::size_t at = plus; at != std::string::npos;) {
        const std::size_t next = name.find('+', at + 1);
        scenario.faults.push_back(sim::parse_fault(name.substr(at + 1, next - at - 1), scenario));
        at = next;
    }
    return scenario;
}

void match(OutingResult& result, const sim::Outing& outing, const std::vector<core::Closure>& found) {
    std::vector<bool> taken(found.size(), false);
    for (const sim::TruthClosure& truth : outing.closures()) {
        ClosurePair pair{truth, outing.scenario().flap.shape, std::nullopt, std::nullopt};
        if (const auto known = known_closing(outing, truth)) pair.bound = tau_bound(*known);
        for (std::size_t i = 0; i < found.size(); ++i) {
            if (taken[i] || std::abs(found[i].time_closed_s - truth.time_closed_s) > kMatch_s) continue;
            pair.found = found[i];
            taken[i] = true;
            break;
        }
        result.closings.push_back(pair);
    }
    result.invented = static_cast<std::size_t>(std::count(taken.begin(), taken.end(), false));
}

}  // namespace

void AreaErrors::add(const core::Quantity& estimate, double truth) {
    const double error = estimate.value - truth;
    count += 1.0;
    error_sum += error;
    error2_sum += error * error;
    truth_sum += truth;
    if (std::abs(error) <= 1.959964 * estimate.sd) inside += 1.0;
    z2_sum += (error / estimate.sd) * (error / estimate.sd);
}

double AreaErrors::mean_error_share() const {
    return count > 0.0 ? error_sum / truth_sum : std::nan("");
}

core::Car workshop_car(const sim::Outing& outing) {
    const sim::Scenario& scenario = outing.scenario();
    const testing::TempFolder folder;  // outings run side by side
    const auto path = folder / "car.toml";
    std::ofstream(path) << sim::car_file_text(scenario);
    const auto car_file = session::read_car_file(path.string());
    if (!car_file)
        throw std::runtime_error("car file of " + scenario.name + ": " +
                                 to_string(car_file.errors().front()));
    const auto bound = session::bind_ride_heights(*car_file, outing.info());
    if (!bound) throw std::runtime_error(scenario.name + ": " + to_string(bound.errors().front()));
    return bound->car;
}

OutingResult run_outing(const std::string& name, std::uint64_t seed) {
    sim::Outing outing(scenario_with_faults(name, seed));
    auto engine = std::make_unique<core::Engine>(workshop_car(outing), core::Settings{});

    OutingResult result;
    result.scenario = name;
    result.seed = seed;
    result.faults = outing.scenario().faults;
    std::vector<core::Closure> found;
    std::vector<core::Estimate> estimates;
    std::int64_t next_ns = 0;
    Frame frame;
    std::chrono::steady_clock::duration spent{};
    while (outing.next(frame)) {
        const auto before = std::chrono::steady_clock::now();
        (void)engine->step(frame);
        if (frame.time_ns >= next_ns) {
            next_ns += kEvery_ns;
            estimates.push_back(engine->estimate());
        }
        spent += std::chrono::steady_clock::now() - before;
        while (const auto c = engine->take_closure()) found.push_back(*c);
        while (const auto a = engine->take_alarm()) result.alarms.push_back(*a);
        frame = Frame{};
    }
    engine->finish();
    while (const auto c = engine->take_closure()) found.push_back(*c);
    result.wall_s = std::chrono::duration<double>(spent).count();
    result.duration_s = static_cast<double>(estimates.back().time_ns) * 1e-9;

    std::size_t at = 0;
    const auto& truth = outing.truth();
    for (const core::Estimate& e : estimates) {
        const double t = static_cast<double>(e.time_ns) * 1e-9;
        while (at + 1 < truth.size() && truth[at + 1].time_s <= t) ++at;
        if (truth[at].speed_mps < kFrom_mps || t < kSettled_s) continue;
        result.cla_front.add(e.cla_front_m2, truth[at].cla_front_m2);
        result.cla_rear.add(e.cla_rear_m2, truth[at].cla_rear_m2);
        result.cda.add(e.cda_m2, truth[at].cda_m2);
    }
    match(result, outing, found);
    return result;
}

}  // namespace holdfast::bench
