// SPDX-License-Identifier: MIT
#include "tests/bench/step/engine_time.hpp"

#include <algorithm>
#include <chrono>
#include <functional>
#include <memory>

#include "estimator/core/engine.hpp"
#include "estimator/outputs/folder.hpp"
#include "estimator/outputs/run.hpp"
#include "estimator/session/log_source.hpp"
#include "tests/bench/step/processor_time.hpp"

namespace holdfast::bench {
namespace {

using core::Engine;

constexpr std::int64_t kEstimate_ns = 20'000'000;  // 50 Hz, as in estimates.csv
constexpr double kDriftEvery = 8.0;                // frames, at 400 Hz

double median(std::vector<double> values) {
    const auto middle = values.begin() + static_cast<std::ptrdiff_t>(values.size() / 2);
    std::nth_element(values.begin(), middle, values.end());
    return *middle;
}

double median_us(int runs, const std::function<void()>& run) {
    std::vector<double> us;
    for (int i = 0; i < runs; ++i) {
        const double begin = processor_us();
        run();
        us.push_back(processor_us() - begin);
    }
    return median(us);
}

std::unique_ptr<Engine> make_engine(const OutingLog& log) {
    return std::make_unique<Engine>(log.bound.car, core::Settings{});
}

void take_events(Engine& engine, std::size_t& closures) {
    while (engine.take_alarm()) {
    }
    while (engine.take_closure()) ++closures;
}

// Which frames meet a running bank: the estimate's flags say so.
std::vector<bool> frames_in_windows(const OutingLog& log, std::size_t& closures) {
    const auto engine = make_engine(log);
    std::vector<bool> inside;
    for (const Frame& frame : log.frames) {
        (void)engine->step(frame);
        inside.push_back((engine->estimate().flags & core::kReattaching) != 0);
        take_events(*engine, closures);
    }
    return inside;
}

struct Stretches {
    double inside_us = 0.0, outside_us = 0.0;
};

// Engine::step over the outing; the clock is read only where a window begins or ends.
Stretches time_steps(const OutingLog& log, const std::vector<bool>& inside) {
    const auto engine = make_engine(log);
    Stretches sum;
    std::size_t taken = 0;
    for (std::size_t i = 0; i < log.frames.size();) {
        const bool window = inside[i];
        const double begin = processor_us();
        for (; i < log.frames.size() && inside[i] == window; ++i) {
            (void)engine->step(log.frames[i]);
            take_events(*engine, taken);
        }
        (window ? sum.inside_us : sum.outside_us) += processor_us() - begin;
    }
    return sum;
}

// By the wall clock, which is quicker to read: an estimate takes about as long as asking for the processor's.
double time_estimates(const OutingLog& log) {
    using Clock = std::chrono::steady_clock;
    const auto engine = make_engine(log);
    Clock::duration spent{};
    std::int64_t next_ns = log.frames.front().time_ns;
    std::size_t taken = 0;
    for (const Frame& frame : log.frames) {
        (void)engine->step(frame);
        take_events(*engine, taken);
        if (frame.time_ns < next_ns) continue;
        next_ns += kEstimate_ns;
        const auto begin = Clock::now();
        (void)engine->estimate();
        spent += Clock::now() - begin;
    }
    return std::chrono::duration<double, std::micro>(spent).count();
}

void read(const OutingLog& log, const std::function<void(Frame&)>& each) {
    const auto source = session::open_log(log.path, session::LogOptions{});
    Frame frame;
    while ((*source)->next(frame)) each(frame);
}

void run_intake(const OutingLog& log) {
    core::Intake intake;
    for (const Frame& frame : log.frames) (void)intake.admit(frame);
}

void run_longitudinal(const OutingLog& log) {
    core::LongitudinalFilter filter(log.bound.car);
    core::LongitudinalFilter::DragInput drag;
    drag.dynamic_pressure_pa = 3000.0;
    drag.mass_kg = log.bound.car.mass_kg.value;
    drag.noise_sd_n = 1000.0;
    int frames = 0;
    for (const Frame& frame : log.frames) {
        filter.predict(1.0 / 400.0, 0.0, 0.01);
        if (frame.has(Channel::speed)) (void)filter.update_speed(60.0, 0.0, 8000.0, 0.1, 8.0);
        if (frame.has(Channel::drive_force)) (void)filter.update_drag(drag, 4.0);
        if (++frames % static_cast<int>(kDriftEvery) == 0)
            filter.drift(kDriftEvery / 400.0, 0.002, true, 0.0);
    }
}

void replay(const OutingLog& log, const std::string& folder) {
    outputs::Folder results(folder,
                            {.log = log.path, .rate_hz = outputs::kDefaultRateHz, .stream = log.stream});
    outputs::Run run(log.bound.car, core::Settings{}, outputs::kDefaultRateHz, {&results});
    const session::FrameAdapter adapter(log.bound.car);
    read(log, [&](Frame& frame) {
        adapter.apply(frame);
        run.step(frame);
    });
    run.finish(true);
}

}  // namespace

EngineTime time_engine(const OutingLog& log, const std::string& folder, double chassis_us, int runs) {
    EngineTime out;
    const auto frames = static_cast<double>(log.frames.size());
    const std::vector<bool> inside = frames_in_windows(log, out.closures);
    out.window_frames = static_cast<std::size_t>(std::count(inside.begin(), inside.end(), true));

    std::vector<double> in_windows_us, outside_us, estimates_us;
    for (int i = 0; i < runs; ++i) {
        const Stretches steps = time_steps(log, inside);
        in_windows_us.push_back(steps.inside_us);
        outside_us.push_back(steps.outside_us);
        estimates_us.push_back(time_estimates(log));
    }
    const double in_windows = median(in_windows_us);
    const double outside = median(outside_us);
    const auto windows = static_cast<double>(out.window_frames);
    out.outside_us = outside / (frames - windows);
    out.window_us = windows > 0.0 ? in_windows / windows : 0.0;
    out.engine_us = (in_windows + outside) / frames;

    const double reading = median_us(runs, [&] { read(log, [](Frame&) {}); }) / frames;
    const double intake = median_us(runs, [&] { run_intake(log); }) / frames;
    const double longitudinal = median_us(runs, [&] { run_longitudinal(log); }) / frames;
    const double estimating = median(estimates_us) / frames;
    out.replay_us = median_us(runs, [&] { replay(log, folder); }) / frames;
    const double bank = windows / frames * (out.window_us - out.outside_us);
    out.parts = {{"reading the log", reading},
                 {"intake", intake},
                 {"longitudinal filter", longitudinal},
                 {"chassis filter", chassis_us},
                 {"rest of a step", out.outside_us - intake - longitudinal - chassis_us},
                 {"bank, in its windows", bank},
                 {"estimates at 50 Hz", estimating},
                 {"writing the results", out.replay_us - reading - out.engine_us - estimating}};
    return out;
}

}  // namespace holdfast::bench
