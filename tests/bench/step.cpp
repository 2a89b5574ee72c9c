// SPDX-License-Identifier: MIT
// What a step costs, in one run:
//   1. a filter step beside OpenCV's KalmanFilter and plain Eigen, on the same states, transition and
//      measurements; exit status 1 where their estimates differ,
//   2. the engine on a whole outing as a multiple of real time, and where the time goes.
//
//   bench_step                   on a simulated outing
//   bench_step LOG --car CAR     on this log
#include <cstdio>
#include <exception>
#include <string>

#include "tests/bench/step/contest.hpp"
#include "tests/bench/step/engine_time.hpp"
#include "tests/bench/step/outing_log.hpp"
#include "tests/temp_folder.hpp"

namespace {

using namespace holdfast::bench;

constexpr std::uint64_t kSeed = 11;
constexpr std::size_t kSteps = 2000;  // five seconds at 400 Hz
constexpr std::size_t kRounds = 201;
constexpr int kRuns = 5;
// Rounding over the steps: a thousandth of what the filters themselves do not know.
constexpr double kMostDifference = 1e-3;

std::vector<Contender> contenders(const LinearModel& model) {
    std::vector<Contender> all;
    all.push_back({"Holdfast chassis filter", make_chassis_filter(model, true)});
    all.push_back({"Eigen, dynamic size", make_eigen_filter(model, false)});
    all.push_back({"Eigen, Joseph form", make_eigen_filter(model, true)});
    all.push_back({"OpenCV KalmanFilter", make_opencv_filter(model)});
    return all;
}

bool agree(const LinearModel& model, const std::vector<Contender>& all) {
    const auto reference = make_chassis_filter(model, false);
    bool good = true;
    for (std::size_t i = 1; i < all.size(); ++i) {
        if (!all[i].filter) continue;
        const Disagreement d = compare(model, *reference, *all[i].filter);
        const bool same = d.estimate_sd <= kMostDifference && d.sd_relative <= kMostDifference;
        std::printf("    %s %-24s estimates within %.1e sd, sd within %.1e\n", same ? "same" : "FAIL",
                    all[i].name.c_str(), d.estimate_sd, d.sd_relative);
        good = good && same;
    }
    return good;
}

// Cost of the chassis filter's step, us, or a negative number where the filters do not agree.
double compare_filters(Measurements which, const char* title) {
    const LinearModel model = make_linear_model(which, kSteps, kSeed);
    const auto all = contenders(model);
    std::printf("%s: %zu states, %zu measurements a step (seed %llu)\n", title, kStates,
                model.measurements.size(), static_cast<unsigned long long>(kSeed));
    if (!agree(model, all)) return -1.0;
    const std::vector<Cost> costs = race(model, all, kRounds);
    for (std::size_t i = 0; i < all.size(); ++i) {
        if (!all[i].filter) {
            std::printf("    %-28s not installed\n", all[i].name.c_str());
        } else {
            std::printf("    %-28s %8.3f us a step   %6.2f x   (quartiles %.2f to %.2f)\n",
                        all[i].name.c_str(), costs[i].step_us, costs[i].ratio, costs[i].ratio_low,
                        costs[i].ratio_high);
        }
    }
    return costs[0].step_us;
}

void tell_engine(const OutingLog& log, const EngineTime& time, const char* what) {
    const double frames = static_cast<double>(log.frames.size());
    const double real_us = 1e6 * log.duration_s() / frames;
    std::printf("Engine on %s: %.1f s, %zu frames, %zu closings; median of %d runs\n", what, log.duration_s(),
                log.frames.size(), time.closures, kRuns);
    for (const Part& part : time.parts) {
        std::printf("    %-28s %8.3f us a frame %6.1f %%\n", part.name.c_str(), part.us_per_frame,
                    100.0 * part.us_per_frame / time.replay_us);
    }
    std::printf("    %-28s %8.3f us a frame, %.3f in the bank's windows (%.1f %% of the frames)\n",
                "Engine::step outside,", time.outside_us, time.window_us,
                100.0 * static_cast<double>(time.window_frames) / frames);
    std::printf("    %-28s %8.3f us a frame   %6.0f x real time\n", "Engine::step, all", time.engine_us,
                real_us / time.engine_us);
    std::printf("    %-28s %8.3f us a frame   %6.0f x real time\n", "replay: read, step, write",
                time.replay_us, real_us / time.replay_us);
}

}  // namespace

int main(int argc, char** argv) {
    const bool simulated = argc == 1;
    if (!simulated && !(argc == 4 && std::string(argv[2]) == "--car")) {
        std::fprintf(stderr, "usage: bench_step [LOG --car CAR]\n");
        return 2;
    }
    try {
        const double chassis_us = compare_filters(Measurements::heights, "Filter step as in the engine");
        const double dense_us =
            compare_filters(Measurements::heights_and_others, "Filter step with dense measurements");
        if (chassis_us < 0.0 || dense_us < 0.0) return 1;

        const holdfast::testing::TempFolder folder;
        const std::string made = folder.path().string();
        if (simulated) simulate_outing(made);
        const OutingLog log =
            simulated ? read_outing(made + "/log.csv.gz", made + "/car.toml") : read_outing(argv[1], argv[3]);
        tell_engine(log, time_engine(log, made + "/results", chassis_us, kRuns),
                    simulated ? "a simulated outing, .csv.gz" : argv[1]);
    } catch (const std::exception& error) {
        std::fprintf(stderr, "error: %s\n", error.what());
        return 1;
    }
    return 0;
}
