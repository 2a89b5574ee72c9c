// SPDX-License-Identifier: MIT
// The load sensors of an axle as one force, whichever of them are left.
#include <catch2/catch.hpp>

#include "estimator/core/axle_loads.hpp"
#include "tests/core/sound_axle.hpp"

namespace {

using namespace holdfast;
using namespace holdfast::core;
using namespace holdfast::testing;

struct Run {
    double worst_n = 0.0;  // of the sum against the truth, after the loss
    double density = 0.0;  // stated at the end
    bool known = true;     // in every step after the loss
};

// 60 s of a sound axle, then the channels are lost for 20 s.
Run run(std::uint64_t seed, std::initializer_list<Channel> lost, bool height_known) {
    SoundAxle axle(seed);
    Intake intake;
    AxleWatch watch(axle.car(), true);
    AxleLoads loads(Channel::load_rl, Channel::load_rr);
    Run out;
    double next_s = 0.0;
    for (double time_s = kAxleStep_s; time_s < 80.0; time_s += kAxleStep_s) {
        Frame frame = axle.frame(time_s);
        const auto truth = axle.truth(time_s);
        if (time_s > 60.0) {
            for (const Channel c : lost) frame.erase(c);
        }
        const std::uint64_t admitted = intake.admit(frame);
        intake.expire(frame.time_ns);
        const auto load = loads.take(frame, admitted, intake, watch,
                                     {truth.accel_y_mps2, truth.speed_mps, truth.dh_m, height_known});
        watch.see(frame);
        if (time_s >= next_s) {
            watch.judge(AxleWatch::kEvery_s, frame.time_ns, truth.speed_mps, truth.accel_y_mps2, true, true,
                        intake.health());
            next_s = time_s + AxleWatch::kEvery_s - 1e-9;
        }
        if (time_s < 60.1) continue;
        out.known = out.known && load.known;
        out.worst_n = std::max(out.worst_n, std::abs(load.sum_n - truth.sum_n));
        out.density = load.noise_density_n2s;
    }
    return out;
}

}  // namespace

TEST_CASE("loads of an axle: the sum of both while both come, seed 1") {
    const Run sound = run(1, {}, true);
    CHECK(sound.known);
    CHECK(sound.worst_n < 200.0);  // the noise of two sensors, 42 N, over some thousand samples
    CHECK(sound.density > 2.0 * 30.0 * 30.0 * kAxleStep_s);
}

TEST_CASE("a corner that falls silent is told from the other and the lateral transfer, less surely, seed 2") {
    const Channel lost = GENERATE(Channel::load_rl, Channel::load_rr);
    const Run left = run(2, {lost}, true);
    CHECK(left.known);
    CHECK(left.worst_n < 400.0);
    CHECK(left.density > 2.0 * run(2, {}, true).density);
}

TEST_CASE("both corners silent: told from the ride height, else not known, seed 3") {
    const Run by_height = run(3, {Channel::load_rl, Channel::load_rr}, true);
    CHECK(by_height.known);
    CHECK(by_height.worst_n < 600.0);
    CHECK_FALSE(run(3, {Channel::load_rl, Channel::load_rr}, false).known);
}
