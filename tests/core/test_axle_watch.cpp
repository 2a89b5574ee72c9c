// SPDX-License-Identifier: MIT
// Sensors of one axle held against each other: which one does not belong is named, and believed again when it
// belongs again.
#include <catch2/catch.hpp>
#include <functional>
#include <vector>

#include "tests/core/sound_axle.hpp"

namespace {

using namespace holdfast;
using namespace holdfast::core;
using namespace holdfast::testing;

constexpr double kFrom_s = 60.0, kUntil_s = 75.0;

// An axle of which one channel is off by error(time since the fault began).
class Watched {
  public:
    explicit Watched(std::uint64_t seed) : axle_(seed), watch_(axle_.car(), true) {}
    void until(double end_s, const std::function<void(Frame&, double)>& spoil = {}) {
        for (; time_s_ < end_s; time_s_ += kAxleStep_s) {
            Frame frame = axle_.frame(time_s_);
            if (spoil) spoil(frame, time_s_ - kFrom_s);
            (void)intake_.admit(frame);
            watch_.see(frame);
            if (time_s_ < next_s_) continue;
            next_s_ = time_s_ + AxleWatch::kEvery_s - 1e-9;
            const auto t = axle_.truth(time_s_);
            watch_.judge(AxleWatch::kEvery_s, frame.time_ns, t.speed_mps, t.accel_y_mps2, true, true,
                         intake_.health());
            for (std::size_t i = 0; i < kChannelCount; ++i) {
                const bool bad = intake_.health()[i].trust == Trust::distrusted;
                if (bad && named_at_s_[i] == 0.0) named_at_s_[i] = time_s_;
            }
        }
    }
    [[nodiscard]] const ChannelHealth& health(Channel c) const { return intake_.health()[index(c)]; }
    [[nodiscard]] double named_at_s(Channel c) const { return named_at_s_[index(c)]; }
    // Channels named so far.
    [[nodiscard]] std::vector<Channel> named() const {
        std::vector<Channel> out;
        for (std::size_t i = 0; i < kChannelCount; ++i)
            if (named_at_s_[i] != 0.0) out.push_back(static_cast<Channel>(i));
        return out;
    }
    [[nodiscard]] const AxleWatch& watch() const { return watch_; }
    [[nodiscard]] const SoundAxle& axle() const { return axle_; }

  private:
    SoundAxle axle_;
    AxleWatch watch_;
    Intake intake_;
    double time_s_ = kAxleStep_s;
    double next_s_ = 0.0;
    std::array<double, kChannelCount> named_at_s_{};
};

constexpr Channel kHeightLeft = ride_height_channel(1), kHeightRight = ride_height_channel(2);

}  // namespace

TEST_CASE("a sound axle: nothing is named, and the relations stand in for each other, seeds 1 to 3") {
    const std::uint64_t seed = GENERATE(1, 2, 3);
    INFO("seed " << seed);
    Watched axle(seed);
    axle.until(120.0);
    CHECK(axle.named().empty());
    const auto t = axle.axle().truth(120.0);
    CHECK(axle.watch().load_from_height_n(t.dh_m, t.speed_mps) == Approx(t.sum_n).margin(300.0));
    CHECK(axle.watch().height_from_load_m(t.sum_n, t.speed_mps) == Approx(t.dh_m).margin(1.5e-3));
    CHECK(axle.watch().side_difference_n(10.0) == Approx(-1000.0).margin(60.0));  // 50 N a side for 1 m/s^2
    CHECK(axle.watch().roll_rad(10.0) == Approx(4e-3).margin(4e-4));
}

TEST_CASE(
    "one sensor jumps: it is named within a second, no other, and believed again after its return, seed 4") {
    struct Case {
        Channel channel;
        double by;
    };
    const Case jump = GENERATE(Case{Channel::load_rl, 2500.0}, Case{Channel::load_rl, -2500.0},
                               Case{Channel::load_rr, 2500.0}, Case{kHeightLeft, 0.012},
                               Case{kHeightRight, 0.012}, Case{kHeightRight, -0.012});
    INFO("channel " << index(jump.channel) << " by " << jump.by);
    Watched axle(4);
    axle.until(kFrom_s);
    axle.until(kUntil_s, [&](Frame& f, double) { f.set(jump.channel, f.get(jump.channel) + jump.by); });
    REQUIRE(axle.named() == std::vector<Channel>{jump.channel});
    CHECK(axle.named_at_s(jump.channel) < kFrom_s + 1.0);
    CHECK(axle.health(jump.channel).trust == Trust::distrusted);
    CHECK(static_cast<double>(axle.health(jump.channel).since_ns) * 1e-9 == Approx(kFrom_s).margin(0.5));
    axle.until(kUntil_s + 10.0);
    CHECK(axle.health(jump.channel).trust == Trust::good);
    CHECK(axle.health(jump.channel).fault == Fault::none);
    CHECK(axle.named().size() == 1);
}

TEST_CASE("one sensor drifts: it is named, no other, seed 5") {
    struct Case {
        Channel channel;
        double per_s;
    };
    const Case drift =
        GENERATE(Case{Channel::load_rl, 60.0}, Case{Channel::load_rr, -60.0}, Case{kHeightLeft, 3e-4});
    INFO("channel " << index(drift.channel) << " by " << drift.per_s << " a second");
    Watched axle(5);
    axle.until(kFrom_s);
    axle.until(kFrom_s + 30.0, [&](Frame& f, double since_s) {
        f.set(drift.channel, f.get(drift.channel) + drift.per_s * since_s);
    });
    CHECK(axle.named() == std::vector<Channel>{drift.channel});
}

TEST_CASE("a kerb under one wheel is nobody's fault, seed 6") {
    Watched axle(6);
    axle.until(kFrom_s);
    axle.until(kFrom_s + 30.0, [](Frame& f, double since_s) {
        if (std::fmod(since_s, 5.0) > 0.06) return;  // 3 m at 50 m/s, every five seconds
        f.set(Channel::load_rl, f.get(Channel::load_rl) + 2500.0);
        f.set(kHeightLeft, f.get(kHeightLeft) - 0.012);
    });
    CHECK(axle.named().empty());
}
