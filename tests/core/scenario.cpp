// SPDX-License-Identifier: MIT
#include "tests/core/scenario.hpp"

#include <cmath>
#include <fstream>
#include <limits>
#include <map>
#include <stdexcept>

#include "estimator/session/bind.hpp"
#include "estimator/session/car_file.hpp"
#include "tests/temp_folder.hpp"

namespace holdfast::testing {
namespace {

constexpr std::int64_t kEstimateEvery_ns = 20'000'000;
constexpr double kSameClosing_s = 0.15;

sim::Scenario planned(const std::string& name, std::uint64_t seed, const Drive::Plan& plan) {
    sim::Scenario scenario = sim::make_scenario(name, seed);
    if (plan) plan(scenario);
    return scenario;
}

core::Car workshop_car(const sim::Scenario& scenario, const StreamInfo& info) {
    const TempFolder folder;
    const auto path = folder / "car.toml";
    std::ofstream(path) << sim::car_file_text(scenario);
    const auto file = session::read_car_file(path.string());
    if (!file) throw std::runtime_error(session::to_string(file.errors()));
    const auto bound = session::bind_ride_heights(*file, info);
    if (!bound) throw std::runtime_error(session::to_string(bound.errors()));
    return bound->car;
}

bool finite(const core::Quantity& q) {
    return std::isfinite(q.value) && std::isfinite(q.sd);
}

}  // namespace

Drive::Drive(const std::string& name, std::uint64_t seed, const Plan& plan)
    : scenario_(planned(name, seed, plan)) {
    sim::Outing outing(scenario_);
    info_ = outing.info();
    car_ = workshop_car(scenario_, info_);
    Frame frame;
    while (outing.next(frame)) frames_.push_back(frame);
    truth_ = outing.truth();
    closings_ = outing.closures();
}

const Drive& Drive::of(const std::string& name, std::uint64_t seed) {
    static std::map<std::pair<std::string, std::uint64_t>, std::unique_ptr<Drive>> drives;
    auto& drive = drives[{name, seed}];
    if (!drive) drive = std::make_unique<Drive>(name, seed);
    return *drive;
}

const sim::TruthSample& Drive::truth_at(double time_s) const {
    const double rate_hz = 1.0 / (truth_[1].time_s - truth_[0].time_s);
    const double at = (time_s - truth_[0].time_s) * rate_hz;
    return truth_[static_cast<std::size_t>(
        std::clamp(std::round(at), 0.0, static_cast<double>(truth_.size() - 1)))];
}

Follow::Follow(const Drive& drive)
    : drive_(&drive), engine_(std::make_unique<core::Engine>(drive.car(), core::Settings{})) {}

Follow::Follow(const Follow& other)
    : drive_(other.drive_),
      engine_(std::make_unique<core::Engine>(*other.engine_)),
      next_(other.next_),
      next_estimate_ns_(other.next_estimate_ns_),
      newest_(other.newest_),
      faults_(other.faults_),
      estimates_(other.estimates_),
      closings_(other.closings_),
      alarms_(other.alarms_) {}

Follow& Follow::add(Fault fault) {
    faults_.push_back(fault);
    return *this;
}
Follow& Follow::drop(Channel channel) {
    return add({Fault::Kind::drop, channel});
}
Follow& Follow::freeze(Channel channel) {
    return add({Fault::Kind::freeze, channel, newest_[index(channel)]});
}
Follow& Follow::jump(Channel channel, double by) {
    return add({Fault::Kind::jump, channel, by});
}
Follow& Follow::invalid(Channel channel) {
    return add({Fault::Kind::invalid, channel});
}
Follow& Follow::heal() {
    faults_.clear();
    return *this;
}

void Follow::spoil(Frame& frame) const {
    for (const Fault& fault : faults_) {
        if (!frame.has(fault.channel)) continue;
        switch (fault.kind) {
            case Fault::Kind::drop:
                frame.erase(fault.channel);
                break;
            case Fault::Kind::freeze:
                frame.set(fault.channel, fault.by);
                break;
            case Fault::Kind::jump:
                frame.set(fault.channel, frame.get(fault.channel) + fault.by);
                break;
            case Fault::Kind::invalid:
                frame.set(fault.channel, std::numeric_limits<double>::quiet_NaN());
                break;
        }
    }
}

Follow& Follow::until(double time_s) {
    for (; next_ < drive_->frames().size() && drive_->frames()[next_].time_s() < time_s; ++next_) {
        Frame frame = drive_->frames()[next_];
        for (std::size_t i = 0; i < kChannelCount; ++i) {
            if (frame.has(static_cast<Channel>(i))) newest_[i] = frame.value[i];
        }
        if (!faults_.empty()) spoil(frame);
        (void)engine_->step(frame);
        if (frame.time_ns >= next_estimate_ns_) {
            next_estimate_ns_ = frame.time_ns + kEstimateEvery_ns;
            estimates_.push_back(engine_->estimate());
        }
        collect();
    }
    return *this;
}

Follow& Follow::skip(double time_s) {
    const auto& frames = drive_->frames();
    const double until_s = frames[next_].time_s() + time_s;
    while (next_ < frames.size() && frames[next_].time_s() < until_s) ++next_;
    return *this;
}

Follow& Follow::to_the_end() {
    until(std::numeric_limits<double>::infinity());
    engine_->finish();
    collect();
    return *this;
}

void Follow::collect() {
    while (const auto closing = engine_->take_closure()) closings_.push_back(*closing);
    while (const auto alarm = engine_->take_alarm()) alarms_.push_back(*alarm);
}

std::optional<core::Closure> Follow::found(const sim::TruthClosure& truth) const {
    for (const core::Closure& c : closings_) {
        if (std::abs(c.time_closed_s - truth.time_closed_s) < kSameClosing_s) return c;
    }
    return std::nullopt;
}

bool finite(const core::Estimate& e) {
    return std::isfinite(e.speed_mps) && std::isfinite(e.air_speed_mps) &&
           std::isfinite(e.air_density_kgpm3) && finite(e.cla_front_m2) && finite(e.cla_rear_m2) &&
           finite(e.cda_m2) && finite(e.attached) && finite(e.downforce_front_n) &&
           finite(e.downforce_rear_n) && finite(e.drag_n) && finite(e.flap_area_m2);
}

bool finite(const core::Closure& c) {
    const bool times = std::isfinite(c.time_command_s) && std::isfinite(c.time_closed_s) &&
                       std::isfinite(c.speed_mps) && std::isfinite(c.closing_time_s);
    const bool reattachment = finite(c.tau_s) && std::isfinite(c.t95_s) && std::isfinite(c.t95_low_s) &&
                              std::isfinite(c.t95_high_s) && std::isfinite(c.plateau);
    const bool brakes = std::isfinite(c.time_brake_s) && finite(c.margin_s) && finite(c.shortfall_n) &&
                        std::isfinite(c.shortfall_share) && std::isfinite(c.probability_short);
    return times && reattachment && brakes && std::isfinite(c.probability_slow) &&
           std::isfinite(c.flap_downforce_n);
}

}  // namespace holdfast::testing
