// SPDX-License-Identifier: MIT
#include "estimator/outputs/run.hpp"

#include <cmath>
#include <utility>

#include "estimator/core/engine.hpp"
#include "estimator/outputs/text.hpp"

namespace holdfast::outputs {
namespace {

constexpr std::int64_t kHealthPeriodNs = 1'000'000'000;

// The first multiple of the period after `time`; the grid starts at source time 0, so that a listener who
// joins late samples at the same instants.
std::int64_t next_multiple(std::int64_t time_ns, std::int64_t period_ns) {
    std::int64_t whole = time_ns / period_ns;
    if (time_ns % period_ns < 0) --whole;
    return (whole + 1) * period_ns;
}

}  // namespace

Run::Run(const core::Car& car, const core::Settings& settings, double rate_hz, std::vector<Sink*> sinks,
         Knowledge knowledge)
    : engine_(std::make_unique<core::Engine>(car, settings)),
      period_ns_(std::llround(1e9 / rate_hz)),
      sinks_(std::move(sinks)),
      knowledge_(knowledge) {
    for (Sink* sink : sinks_) sink->on_begin(*this);
}

Run::~Run() = default;

const core::Estimate& Run::estimate() {
    return engine_->estimate();
}
const core::HealthTable& Run::health() const {
    return engine_->health();
}
bool Run::regrowth(core::Regrowth& out) {
    return engine_->regrowth(out);
}

void Run::step(const Frame& frame) {
    switch (engine_->step(frame)) {
        case core::StepResult::repeated:
            ++end_.repeated;
            return;
        case core::StepResult::out_of_order:
            ++end_.out_of_order;
            return;
        case core::StepResult::done:
            break;
    }
    const std::int64_t time_ns = frame.time_ns;
    if (end_.frames++ == 0) first_ns_ = next_estimate_ns_ = next_health_ns_ = time_ns;
    last_ns_ = time_ns;

    for (Sink* sink : sinks_) sink->on_frame(frame);
    hand_on_events();
    if (time_ns >= next_estimate_ns_) {
        next_estimate_ns_ = next_multiple(time_ns, period_ns_);
        if (knowledge_ == Knowledge::of_the_outing) {
            held_.push_back(engine_->estimate());
        } else {
            for (Sink* sink : sinks_) sink->on_estimate(engine_->estimate());
        }
    }
    if (core::SlowSnapshot snapshot;
        knowledge_ == Knowledge::of_the_outing && engine_->take_slow_snapshot(snapshot)) {
        smoother_.add(snapshot);
    }
    if (time_ns >= next_health_ns_) {
        next_health_ns_ = next_multiple(time_ns, kHealthPeriodNs);
        hand_on_health(time_ns);
    }
}

void Run::finish(bool complete, std::string reason) {
    engine_->finish();
    hand_on_events();
    hand_on_smoothed();
    hand_on_health(last_ns_);
    end_.complete = complete;
    end_.reason = std::move(reason);
    end_.duration_s = seconds(last_ns_ - first_ns_);
    if (end_.frames > 0) end_.learned = engine_->learned();
    for (Sink* sink : sinks_) sink->on_end(end_);
}

void Run::hand_on_smoothed() {
    if (knowledge_ != Knowledge::of_the_outing) return;
    smoother_.solve();
    for (core::Estimate& estimate : held_) {
        smoother_.apply(estimate);
        for (Sink* sink : sinks_) sink->on_estimate(estimate);
    }
}

void Run::hand_on_events() {
    // Alarms first: they are urgent, and may speak of a closing whose record comes later.
    while (const auto alarm = engine_->take_alarm())
        for (Sink* sink : sinks_) sink->on_alarm(*alarm);
    while (const auto closure = engine_->take_closure())
        for (Sink* sink : sinks_) sink->on_closure(*closure);
}

void Run::hand_on_health(std::int64_t time_ns) {
    for (Sink* sink : sinks_) sink->on_health(time_ns, engine_->health());
}

}  // namespace holdfast::outputs
