// SPDX-License-Identifier: MIT
// The door: gaps, repeats, values that are no values, stuck channels and their return.
#include <catch2/catch.hpp>
#include <cmath>
#include <limits>
#include <random>

#include "estimator/core/intake.hpp"

namespace {

using namespace holdfast;
using namespace holdfast::core;

constexpr Channel kChannel = Channel::load_rl;

// A channel at 400 Hz with noise; the test moves the clock and chooses the values.
class Stream {
  public:
    explicit Stream(std::uint64_t seed) : random_(seed) {}
    // Samples of 3000 N with 37 N of noise; how many were admitted.
    int send(int samples) {
        int admitted = 0;
        for (int i = 0; i < samples; ++i) admitted += send_value(3000.0 + 37.0 * normal_(random_)) ? 1 : 0;
        return admitted;
    }
    bool send_value(double value) {
        Frame frame;
        frame.time_ns = time_ns_;
        frame.set(kChannel, value);
        time_ns_ += 2'500'000;
        return (intake_.admit(frame) & (std::uint64_t{1} << index(kChannel))) != 0;
    }
    void pause(double time_s) { time_ns_ += static_cast<std::int64_t>(time_s * 1e9); }
    [[nodiscard]] const ChannelHealth& health() const { return intake_.health()[index(kChannel)]; }
    [[nodiscard]] const Intake& intake() const { return intake_; }
    [[nodiscard]] std::int64_t now_ns() const { return time_ns_; }

  private:
    std::mt19937_64 random_;
    std::normal_distribution<double> normal_;
    std::int64_t time_ns_ = 0;
    Intake intake_;
};

}  // namespace

TEST_CASE("a sound channel: all admitted, its interval and its noise learned, seeds 1 to 3") {
    const std::uint64_t seed = GENERATE(1, 2, 3);
    INFO("seed " << seed);
    Stream stream(seed);
    CHECK(stream.health().trust == Trust::absent);
    CHECK(std::isinf(stream.intake().age_s(kChannel, 0)));
    CHECK(stream.send(4000) == 4000);
    CHECK(stream.health().samples == 4000);
    CHECK(stream.health().gaps == 0);
    CHECK(stream.health().trust == Trust::good);
    CHECK(stream.health().interval_s == Approx(0.0025).epsilon(1e-6));
    CHECK(stream.intake().noise_sd(kChannel) == Approx(37.0).epsilon(0.15));
    CHECK(stream.intake().age_s(kChannel, stream.now_ns()) == Approx(0.0025));
}

TEST_CASE("pauses of more than three intervals are gaps, each counted once; a jittered sample is none") {
    Stream stream(4);
    stream.send(100);
    stream.pause(0.0025);  // one sample missing
    stream.send(50);
    CHECK(stream.health().gaps == 0);
    stream.pause(0.010);
    stream.send(50);
    CHECK(stream.health().gaps == 1);
    stream.pause(7.0);
    CHECK(stream.intake().age_s(kChannel, stream.now_ns()) == Approx(7.0025));
    stream.send(50);
    CHECK(stream.health().gaps == 2);
    CHECK(stream.health().interval_s == Approx(0.0025).epsilon(0.05));  // the pauses are not its rate
    CHECK(stream.health().trust == Trust::good);
}

TEST_CASE("what is no number or no such quantity is counted and kept out") {
    Stream stream(5);
    stream.send(100);
    const double inf = std::numeric_limits<double>::infinity();
    CHECK_FALSE(stream.send_value(std::numeric_limits<double>::quiet_NaN()));
    CHECK(stream.health().status.result == FusionResult::not_finite);
    CHECK_FALSE(stream.send_value(inf));
    CHECK_FALSE(stream.send_value(-inf));
    CHECK(stream.health().not_finite == 3);
    CHECK_FALSE(stream.send_value(info(kChannel).most * 1.001));
    CHECK(stream.health().status.result == FusionResult::out_of_range);
    CHECK_FALSE(stream.send_value(info(kChannel).least * 1.001));
    CHECK(stream.health().out_of_range == 2);
    CHECK(stream.health().samples == 100);
    CHECK(stream.send_value(info(kChannel).most));  // the bound itself is believed
    CHECK(stream.send(100) == 100);
}

TEST_CASE("every channel has a range, and its ends are numbers") {
    for (std::size_t i = 0; i < kChannelCount; ++i) {
        const ChannelInfo& c = info(static_cast<Channel>(i));
        INFO(c.name);
        CHECK(std::isfinite(c.least));
        CHECK(c.least < c.most);
    }
}

TEST_CASE("repeated frames are counted for each channel that they carry") {
    Stream stream(6);
    stream.send(10);
    Intake intake;
    Frame frame;
    frame.set(kChannel, 1.0);
    frame.set(Channel::speed, 2.0);
    intake.count_repeats(frame);
    intake.count_repeats(frame);
    CHECK(intake.health()[index(kChannel)].repeats == 2);
    CHECK(intake.health()[index(Channel::speed)].repeats == 2);
    CHECK(intake.health()[index(Channel::accel_x)].repeats == 0);
    CHECK(intake.health()[index(kChannel)].samples == 0);
}

TEST_CASE(
    "a lively channel that stops moving is distrusted from its first still sample on, and believed again "
    "when it moves, seed 7") {
    Stream stream(7);
    stream.send(2000);
    const std::int64_t stuck_since_ns = stream.now_ns();
    const double value = 3010.5;
    int admitted = 0;
    for (int i = 0; i < 400; ++i) admitted += stream.send_value(value) ? 1 : 0;
    CHECK(stream.health().trust == Trust::distrusted);
    CHECK(stream.health().fault == Fault::stuck);
    CHECK(stream.health().since_ns == stuck_since_ns);
    CHECK(admitted < 60);  // seen within 150 ms
    CHECK(stream.health().status.result == FusionResult::distrusted);
    CHECK(stream.send(400) > 300);
    CHECK(stream.health().trust == Trust::good);
    CHECK(stream.health().fault == Fault::none);
}

TEST_CASE("a channel that is quiet by nature is not stuck") {
    Stream stream(8);
    for (int i = 0; i < 4000; ++i) REQUIRE(stream.send_value(i < 2000 ? 0.0 : 1.0));
    CHECK(stream.health().trust == Trust::good);
}
