// SPDX-License-Identifier: MIT
// A small language over the simulated car and the engine:
//
//     const Drive& drive = Drive::of("open_wheel-full", 7);       // frames and truth, driven once
//     Follow follow(drive);                                        // an engine with the workshop's car file
//     follow.until(80.0);
//     Follow other = follow;                                       // the same engine goes on elsewhere
//     other.drop(Channel::load_rl).until(95.0).heal().until(120.0);
//     other.closings(); other.estimates(); other.alarms();
//
// Truth, sensors and faults are three things: the frames are never changed, a fault stands between them and
// the engine.
#pragma once

#include <array>
#include <functional>
#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "estimator/core/engine.hpp"
#include "firmware_host/car/outing.hpp"

namespace holdfast::testing {

// One outing of the simulated car: every frame, and the truth.
class Drive {
  public:
    // Driven on first use, then kept. `plan` may change the scenario first; it belongs to the name.
    static const Drive& of(const std::string& name, std::uint64_t seed);
    using Plan = std::function<void(sim::Scenario&)>;
    Drive(const std::string& name, std::uint64_t seed, const Plan& plan = {});

    [[nodiscard]] const core::Car& car() const { return car_; }
    [[nodiscard]] const StreamInfo& info() const { return info_; }
    [[nodiscard]] const sim::Scenario& scenario() const { return scenario_; }
    [[nodiscard]] const std::vector<Frame>& frames() const { return frames_; }
    [[nodiscard]] double end_s() const { return frames_.back().time_s(); }
    [[nodiscard]] const std::vector<sim::TruthClosure>& closings() const { return closings_; }
    [[nodiscard]] const sim::TruthSample& truth_at(double time_s) const;

  private:
    sim::Scenario scenario_;
    StreamInfo info_;
    core::Car car_;
    std::vector<Frame> frames_;
    std::vector<sim::TruthSample> truth_;
    std::vector<sim::TruthClosure> closings_;
};

// An engine that follows a drive, frame by frame. Copies go their own ways.
class Follow {
  public:
    explicit Follow(const Drive& drive);
    Follow(const Follow& other);
    Follow& operator=(const Follow&) = delete;

    // Faults from here on; heal() ends them all.
    Follow& drop(Channel channel);             // no samples
    Follow& freeze(Channel channel);           // the newest value again and again
    Follow& jump(Channel channel, double by);  // so much more, SI
    Follow& invalid(Channel channel);          // not-a-number
    Follow& heal();

    Follow& until(double time_s);  // steps the engine; an estimate is kept every 20 ms
    Follow& skip(double time_s);   // frames of so long do not arrive
    Follow& to_the_end();          // and finishes

    [[nodiscard]] core::Engine& engine() { return *engine_; }
    [[nodiscard]] const Drive& drive() const { return *drive_; }
    [[nodiscard]] const std::vector<core::Estimate>& estimates() const { return estimates_; }
    [[nodiscard]] const std::vector<core::Closure>& closings() const { return closings_; }
    [[nodiscard]] const std::vector<core::Alarm>& alarms() const { return alarms_; }
    // The closing that was found where the truth has one.
    [[nodiscard]] std::optional<core::Closure> found(const sim::TruthClosure& truth) const;
    [[nodiscard]] const core::ChannelHealth& health(Channel c) const { return engine_->health()[index(c)]; }

  private:
    struct Fault {
        enum class Kind { drop, freeze, jump, invalid } kind;
        Channel channel;
        double by = 0.0;
    };
    Follow& add(Fault fault);
    void spoil(Frame& frame) const;
    void collect();

    const Drive* drive_;
    std::unique_ptr<core::Engine> engine_;
    std::size_t next_ = 0;
    std::int64_t next_estimate_ns_ = 0;
    std::array<double, kChannelCount> newest_{};  // of the drive, whatever the faults
    std::vector<Fault> faults_;
    std::vector<core::Estimate> estimates_;
    std::vector<core::Closure> closings_;
    std::vector<core::Alarm> alarms_;
};

// Whether every number of it is one. Lap distance at the brakes may be unknown.
[[nodiscard]] bool finite(const core::Estimate& estimate);
[[nodiscard]] bool finite(const core::Closure& closing);

}  // namespace holdfast::testing
