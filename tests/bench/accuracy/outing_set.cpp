// SPDX-License-Identifier: MIT
#include "tests/bench/accuracy/outing_set.hpp"

#include <algorithm>
#include <atomic>
#include <exception>
#include <mutex>
#include <stdexcept>
#include <thread>

namespace holdfast::bench {

std::vector<std::string> usual_scenarios() {
    return {"open_wheel",        "prototype",         "heavy_closed",
            "open_wheel-first",  "prototype-first",   "heavy_closed-first",
            "open_wheel-point",  "open_wheel-tail",   "open_wheel-windy",
            "open_wheel-rough",  "open_wheel-noisy",  "prototype-windy",
            "open_wheel-full",   "prototype-full",    "heavy_closed-full",
            "open_wheel-tight",  "open_wheel-smooth", "prototype-noisy-rough",
            "open_wheel-peaked", "open_wheel-sick",   "prototype-sick",
            "heavy_closed-sick"};
}

std::vector<std::string> fault_scenarios() {
    return {"open_wheel+load_rl:stuck:60",
            "open_wheel+load_fr:gone:60",
            "open_wheel+load_rr:drift:60:25",
            "open_wheel+load_fl:spikes:60:2000",
            "open_wheel+load_rl:step:60:600",
            "open_wheel+ride_height_front:stuck:60",
            "open_wheel+ride_height_rear_left:gone:60",
            "prototype+ride_height_rear_right:drift:60:0.0003",
            "prototype+ride_height_front_left:spikes:60:0.01",
            "prototype+ride_height_rear_left:step:60:0.006",
            "open_wheel+speed:stuck:60",
            "open_wheel+accel_x:gone:60",
            "open_wheel+accel_x:step:60:4",
            "open_wheel+drive_force:step:60:4000",
            "open_wheel-full+accel_z:step:60:5",
            "open_wheel-full+pitot_pressure:stuck:60"};
}

std::vector<std::string> short_scenarios() {
    return {"open_wheel-first", "prototype-windy", "heavy_closed", "open_wheel-sick"};
}

std::vector<OutingResult> run_outings(const std::vector<std::string>& scenarios, std::uint64_t first_seed,
                                      std::size_t seeds) {
    std::vector<OutingResult> results(scenarios.size() * seeds);
    std::atomic<std::size_t> next{0};
    std::mutex mutex;
    std::string failures;
    const auto work = [&] {
        for (std::size_t i = next++; i < results.size(); i = next++) {
            try {
                results[i] = run_outing(scenarios[i / seeds], first_seed + i % seeds);
            } catch (const std::exception& e) {
                const std::lock_guard lock(mutex);
                failures += scenarios[i / seeds] + ": " + e.what() + "\n";
            }
        }
    };
    std::vector<std::thread> workers;
    for (unsigned w = 0; w < std::max(1U, std::thread::hardware_concurrency()); ++w)
        workers.emplace_back(work);
    for (std::thread& w : workers) w.join();
    if (!failures.empty()) throw std::runtime_error(failures);
    return results;
}

}  // namespace holdfast::bench
