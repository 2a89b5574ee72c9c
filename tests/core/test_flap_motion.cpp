// SPDX-License-Identifier: MIT
// The flap's cycle from a sampled, noisy position, with and without the command's channel.
#include <catch2/catch.hpp>
#include <cmath>
#include <functional>
#include <numbers>
#include <random>
#include <vector>

#include "estimator/core/flap_motion.hpp"

namespace {

using holdfast::core::FlapMotion;
using holdfast::core::FlapPhase;

enum class Travel { straight, eased, cosine };

double share_moved(Travel travel, double part) {
    const double p = std::clamp(part, 0.0, 1.0);
    if (travel == Travel::eased) return p * p * (3.0 - 2.0 * p);
    if (travel == Travel::cosine) return 0.5 - 0.5 * std::cos(std::numbers::pi * p);
    return p;
}

struct Closing {
    double command_s, began_s, shut_s;  // asked for, first movement, end of travel
};

struct Found {
    Closing times{};
    double seen_at_s = 0.0;  // when the closing was reported as begun
};

// Opens at 1 s within 0.08 s, is asked to close at 3 s, moves 5 ms later for travel_s. position and asked(t)
// may be replaced.
struct Flap {
    double travel_s = 0.08;
    Travel travel = Travel::straight;
    double delay_s = 0.005;
    double noise_sd = 0.004;
    double offset = 0.0;
    bool with_command = true;
    double rate_hz = 400.0;
    std::uint64_t seed = 1;

    [[nodiscard]] double position(double t) const {
        return share_moved(travel, (t - 1.0) / 0.08) - share_moved(travel, (t - 3.0 - delay_s) / travel_s);
    }
    // Closings that were followed to their end; shut and reopened counted.
    std::vector<Found> run(const std::function<double(double)>& where,
                           const std::function<bool(double)>& asked, int& reopened) const {
        std::mt19937_64 random(seed);
        std::normal_distribution<double> noise(0.0, noise_sd);
        FlapMotion flap;
        std::vector<Found> found;
        double seen_at_s = 0.0;
        reopened = 0;
        for (int i = 0; i < static_cast<int>(6.0 * rate_hz); ++i) {
            const double t = i / rate_hz;
            if (with_command) flap.command(t, asked(t) ? 1.0 : 0.0);
            const auto step = flap.position(t, where(t) + offset + noise(random));
            if (step.closing_began) seen_at_s = t;
            if (step.reopened) ++reopened;
            if (step.shut)
                found.push_back(
                    {{flap.time_command_s(), flap.time_moved_s(), flap.time_shut_s()}, seen_at_s});
        }
        return found;
    }
    [[nodiscard]] std::vector<Found> run() const {
        int ignored = 0;
        return run([this](double t) { return position(t); }, [](double t) { return t >= 1.0 && t < 3.0; },
                   ignored);
    }
};

}  // namespace

TEST_CASE("one closing, found once, its times within a few samples") {
    const std::uint64_t seed = GENERATE(1, 2, 3, 4, 5, 6);
    const bool with_command = GENERATE(true, false);
    const double travel_s = GENERATE(0.03, 0.08, 0.2);
    INFO("seed " << seed << ", command " << with_command << ", travel " << travel_s << " s");
    const Flap flap{.travel_s = travel_s, .with_command = with_command, .seed = seed};
    const auto found = flap.run();
    REQUIRE(found.size() == 1);
    const Closing& c = found[0].times;
    if (with_command) {
        CHECK(c.command_s == Approx(3.0).margin(0.0026));
    } else {  // from the first movement
        CHECK(c.command_s == Approx(3.005).margin(0.004 + 0.03 * travel_s));
    }
    CHECK(c.began_s == Approx(3.005).margin(0.004 + 0.03 * travel_s));
    CHECK(c.shut_s == Approx(3.005 + travel_s).margin(0.003 + 0.02 * travel_s));
    CHECK(found[0].seen_at_s < 3.005 + 0.12 * travel_s + 0.006);
}

TEST_CASE("a travel that is eased at its ends: the end is found although the last part crawls") {
    const auto travel = GENERATE(Travel::eased, Travel::cosine);
    const std::uint64_t seed = GENERATE(1, 2, 3, 4, 5, 6);
    const double travel_s = GENERATE(0.06, 0.12);
    INFO("seed " << seed << ", travel " << travel_s << " s");
    const Flap flap{.travel_s = travel_s, .travel = travel, .seed = seed};
    const auto found = flap.run();
    REQUIRE(found.size() == 1);
    // Within the sensor's noise the last 8 % of an eased travel cannot be told from rest.
    CHECK(found[0].times.shut_s == Approx(3.005 + travel_s).margin(0.08 * travel_s + 0.003));
}

TEST_CASE("a sensor that reads 1 % off at its ends, seeds 1 to 4") {
    const double offset = GENERATE(-0.01, 0.01);
    const std::uint64_t seed = GENERATE(1, 2, 3, 4);
    INFO("seed " << seed << ", offset " << offset);
    const Flap flap{.offset = offset, .seed = seed};
    const auto found = flap.run();
    REQUIRE(found.size() == 1);
    CHECK(found[0].times.shut_s == Approx(3.085).margin(0.005));
}

TEST_CASE("a closing that is given up half way is none, and the next one is found") {
    const bool with_command = GENERATE(true, false);
    INFO("command " << with_command);
    const Flap flap{.with_command = with_command};
    int reopened = 0;
    // Falls to 0.6 between 2.0 and 2.05 s and goes back up.
    const auto where = [&](double t) {
        const double dip =
            0.4 * (std::clamp((t - 2.0) / 0.05, 0.0, 1.0) - std::clamp((t - 2.05) / 0.05, 0.0, 1.0));
        return flap.position(t) - dip;
    };
    const auto asked = [](double t) { return t >= 1.0 && t < 3.0 && !(t >= 1.995 && t < 2.045); };
    const auto found = flap.run(where, asked, reopened);
    CHECK(reopened == 1);
    REQUIRE(found.size() == 1);
    CHECK(found[0].times.shut_s == Approx(3.085).margin(0.006));
}

TEST_CASE("a flap that creeps shut over a second and a half is followed to its end") {
    const bool with_command = GENERATE(true, false);
    const Flap flap{.travel_s = 1.5, .with_command = with_command};
    const auto found = flap.run();
    REQUIRE(found.size() == 1);
    CHECK(found[0].times.shut_s == Approx(4.505).margin(0.04));
}

TEST_CASE("a flap that never quite opens, and a noisy one that stays open, are no closings") {
    Flap flap;
    int reopened = 0;
    const auto half = [&](double t) { return 0.5 * flap.position(t); };
    CHECK(flap.run(
                  half, [](double t) { return t >= 1.0 && t < 3.0; }, reopened)
              .empty());
    flap.noise_sd = 0.01;
    flap.with_command = GENERATE(true, false);
    const auto open = [](double t) { return t > 1.0 ? 1.0 : 0.0; };
    CHECK(flap.run(
                  open, [](double t) { return t >= 1.0; }, reopened)
              .empty());
    CHECK(reopened == 0);
}

TEST_CASE("a flap that shuts without being asked to is found from its movement") {
    const Flap flap;
    int reopened = 0;
    const auto found =
        flap.run([&](double t) { return flap.position(t); }, [](double t) { return t >= 1.0; }, reopened);
    REQUIRE(found.size() == 1);
    CHECK(found[0].times.command_s == Approx(3.005).margin(0.006));
    CHECK(found[0].times.shut_s == Approx(3.085).margin(0.005));
}
