// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <cmath>
#include <string>
#include <vector>

#include "estimator/outputs/run.hpp"
#include "estimator/outputs/tables.hpp"
#include "tests/core/scenario.hpp"

namespace {

using namespace holdfast;
using namespace holdfast::testing;
using outputs::Knowledge;

struct Heard : outputs::Sink {
    std::vector<core::Estimate> estimates;
    std::vector<std::string> closures;
    double chord_m = 0.0;
    void on_estimate(const core::Estimate& e) override { estimates.push_back(e); }
    void on_closure(const core::Closure& c) override { closures.push_back(outputs::closure_row(c, chord_m)); }
};

Heard heard(const Drive& drive, Knowledge knowledge) {
    Heard sink;
    sink.chord_m = drive.car().flap_chord_m;
    outputs::Run run(drive.car(), {}, outputs::kDefaultRateHz, {&sink}, knowledge);
    for (const Frame& frame : drive.frames()) run.step(frame);
    run.finish(true);
    return sink;
}

// Squared errors of both areas, where air forces stand out, in the first seconds.
struct EarlyError {
    static constexpr double kUntil_s = 25.0, kFrom_mps = 35.0;
    double sum = 0.0, count = 0.0;
    void add(const Drive& drive, const std::vector<core::Estimate>& estimates) {
        for (const core::Estimate& e : estimates) {
            const double time_s = static_cast<double>(e.time_ns) * 1e-9;
            if (time_s > kUntil_s || e.speed_mps < kFrom_mps) continue;
            const sim::TruthSample& truth = drive.truth_at(time_s);
            sum += std::pow(e.cla_front_m2.value - truth.cla_front_m2, 2) +
                   std::pow(e.cla_rear_m2.value - truth.cla_rear_m2, 2);
            count += 2.0;
        }
    }
    [[nodiscard]] double rms_m2() const { return std::sqrt(sum / count); }
};

void same_at_the_end(const Heard& outing, const Heard& moment) {
    REQUIRE(outing.estimates.size() == moment.estimates.size());
    const core::Estimate& smoothed = outing.estimates.back();
    const core::Estimate& known = moment.estimates.back();
    CHECK(smoothed.time_ns == known.time_ns);
    CHECK(smoothed.cla_front_m2.value == known.cla_front_m2.value);
    CHECK(smoothed.cla_rear_m2.value == known.cla_rear_m2.value);
    CHECK(smoothed.cda_m2.value == known.cda_m2.value);
    REQUIRE_FALSE(moment.closures.empty());
    CHECK(outing.closures == moment.closures);
}

}  // namespace

// One outing alone may go either way: soon after its beginning most of the error is the model's own.
TEST_CASE(
    "nine outings, seeds 1 to 3: smoothed areas are nearer to the truth early on, closings are the same") {
    EarlyError moment_error, outing_error;
    for (const char* name : {"open_wheel-full", "prototype-full", "heavy_closed-full"}) {
        for (const std::uint64_t seed : {1, 2, 3}) {
            INFO(name << ", seed " << seed);
            const Drive drive(name, seed, [](sim::Scenario& s) { s.laps = 2; });
            const Heard moment = heard(drive, Knowledge::of_the_moment);
            const Heard outing = heard(drive, Knowledge::of_the_outing);
            moment_error.add(drive, moment.estimates);
            outing_error.add(drive, outing.estimates);
            same_at_the_end(outing, moment);
        }
    }
    REQUIRE(moment_error.count > 1000.0);
    INFO("rms error of the areas before " << EarlyError::kUntil_s << " s: " << moment_error.rms_m2()
                                          << " m^2 as known then, " << outing_error.rms_m2()
                                          << " m^2 smoothed");
    CHECK(outing_error.rms_m2() < 0.95 * moment_error.rms_m2());
}
