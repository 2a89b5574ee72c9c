// SPDX-License-Identifier: MIT
// How honest the engine is on the simulated car, whose models are not its own: innovations of the size that
// it states, intervals that hold the truth, closings found and none invented.
#include <catch2/catch.hpp>
#include <cmath>
#include <map>

#include "tests/core/scenario.hpp"

namespace {

using namespace holdfast;
using namespace holdfast::testing;

struct Ratio {
    double sum = 0.0, count = 0.0;
    void add(double v) {
        sum += v;
        count += 1.0;
    }
    [[nodiscard]] double value() const { return count > 0.0 ? sum / count : 0.0; }
};

bool on_a_straight(const core::Estimate& e, const Frame& frame) {
    return e.flags == (e.flags & (core::kGroundReference | core::kDragByCoasting)) && e.speed_mps > 50.0 &&
           std::abs(frame.get(Channel::accel_y)) < 2.0 && frame.get(Channel::accel_x) > -3.0;
}

struct Outcome {
    std::map<Channel, Ratio> innovation2;  // over its stated variance, on straights
    Ratio front_inside, rear_inside;       // areas' 95 % bands that hold the truth
    Ratio front_error2, rear_error2;       // areas' errors squared over their stated variance
    std::size_t true_closings = 0, found = 0, invented = 0;
    Ratio t95_inside;
    Ratio usual_called_slow;
};

void judge_closings(const Drive& drive, const std::vector<core::Closure>& found, Outcome& out) {
    out.true_closings += drive.closings().size();
    std::size_t matched = 0;
    for (const sim::TruthClosure& truth : drive.closings()) {
        for (const core::Closure& c : found) {
            if (std::abs(c.time_closed_s - truth.time_closed_s) > 0.15) continue;
            ++matched;
            if (c.reattachment_known && c.whole && truth.plateau == 1.0 && std::isfinite(truth.t95_s)) {
                out.t95_inside.add(c.t95_low_s <= truth.t95_s && truth.t95_s <= c.t95_high_s ? 1.0 : 0.0);
                if (c.usual_known && !truth.slow) out.usual_called_slow.add(c.slow ? 1.0 : 0.0);
            }
            break;
        }
    }
    out.found += matched;
    out.invented += found.size() - matched;
}

void follow(const std::string& name, std::uint64_t seed, Outcome& out) {
    const Drive drive(name, seed);
    const auto engine = std::make_unique<core::Engine>(drive.car(), core::Settings{});
    std::vector<core::Closure> found;
    Frame newest;  // of every channel
    for (const Frame& frame : drive.frames()) {
        (void)engine->step(frame);
        for (std::size_t i = 0; i < kChannelCount; ++i) {
            if (frame.has(static_cast<Channel>(i))) newest.set(static_cast<Channel>(i), frame.value[i]);
        }
        while (const auto c = engine->take_closure()) found.push_back(*c);
        // At 50 Hz, when the channels of 100 Hz have their sample too.
        if (frame.time_s() < 30.0 || frame.time_ns % 20'000'000 != 7'500'000) continue;
        const core::Estimate& e = engine->estimate();
        if (!on_a_straight(e, newest)) continue;
        for (std::size_t i = 0; i < kChannelCount; ++i) {
            const core::MeasurementStatus& s = engine->health()[i].status;
            if (s.time_ns != frame.time_ns || s.innovation_variance <= 0.0) continue;
            out.innovation2[static_cast<Channel>(i)].add(s.innovation * s.innovation / s.innovation_variance);
        }
        const sim::TruthSample& truth = drive.truth_at(frame.time_s());
        const auto judge = [](const core::Quantity& q, double t, Ratio& inside, Ratio& error2) {
            const double z = (q.value - t) / q.sd;
            inside.add(std::abs(z) < 1.96 ? 1.0 : 0.0);
            error2.add(z * z);
        };
        judge(e.cla_front_m2, truth.cla_front_m2, out.front_inside, out.front_error2);
        judge(e.cla_rear_m2, truth.cla_rear_m2, out.rear_inside, out.rear_error2);
    }
    engine->finish();
    while (const auto c = engine->take_closure()) found.push_back(*c);
    judge_closings(drive, found, out);
}

}  // namespace

TEST_CASE("six outings of three kinds of car, seeds 1 and 2: closings, intervals, innovations", "[long]") {
    Outcome out;
    for (const char* name : {"open_wheel", "prototype-full", "heavy_closed"})
        for (const std::uint64_t seed : {1, 2}) follow(name, seed, out);
    CHECK(out.found == out.true_closings);
    CHECK(out.invented == 0);
    INFO("t95 inside " << out.t95_inside.sum << " of " << out.t95_inside.count << ", usual ones called slow "
                       << out.usual_called_slow.sum << " of " << out.usual_called_slow.count
                       << ", front inside " << out.front_inside.value() << ", rear inside "
                       << out.rear_inside.value() << ", squares of their errors over stated variance "
                       << out.front_error2.value() << ", " << out.rear_error2.value());
    REQUIRE(out.t95_inside.count > 40);
    CHECK(out.t95_inside.value() > 0.8);  // 95 % stated; shape and start are not the filter's own
    REQUIRE(out.usual_called_slow.count > 20);
    CHECK(out.usual_called_slow.value() < 0.1);
    // Errors of an outing keep their sign: six outings are a handful of independent ones.
    CHECK(out.front_inside.value() > 0.7);
    CHECK(out.rear_inside.value() > 0.7);
    CHECK(out.front_error2.value() < 4.0);
    CHECK(out.rear_error2.value() < 4.0);
    // With so many samples a true model would keep within 3 % of 1 (chi-square). Wider, because the engine's
    // shaking, the sensors' steps and the slip are met as white noise, and the road is learned as it comes.
    for (const Channel c : {Channel::ride_height_0, ride_height_channel(1), ride_height_channel(2)}) {
        INFO(channel_name(c, {}) << ": " << out.innovation2[c].value());
        REQUIRE(out.innovation2[c].count > 1000);
        CHECK(out.innovation2[c].value() > 0.75);
        CHECK(out.innovation2[c].value() < 1.3);
    }
    for (const Channel c : {Channel::speed, Channel::accel_z}) {
        INFO(channel_name(c, {}) << ": " << out.innovation2[c].value());
        REQUIRE(out.innovation2[c].count > 1000);
        CHECK(out.innovation2[c].value() > 0.3);
        CHECK(out.innovation2[c].value() < 2.0);
    }
}
