// SPDX-License-Identifier: MIT
// The flap's flow against the closed forms of its three shapes, at constant air speed.
#include <catch2/catch.hpp>
#include <cmath>

#include "firmware_host/car/flap.hpp"

namespace {

using namespace holdfast::sim;

constexpr double kStepS = 0.0005;
constexpr double kAirMps = 80.0;

struct Trace {
    double time_crossing_s = -1.0;  // position falls below attach_position
    double time_95_s = -1.0;
    double least = 1.0;
    double last = 1.0;
};

// Opens the flap for a second, closes it, and watches for two seconds.
Trace open_and_close(const FlapParameters& parameters, const Closing& closing) {
    Flap flap(parameters);
    Trace trace;
    double before = 1.0;
    bool rising = false;
    for (int i = 0; i < 6000; ++i) {
        const double time_s = i * kStepS;
        const bool open = i < 2000;
        flap.step(open, closing, kAirMps, kStepS);
        trace.least = std::min(trace.least, flap.attached());
        if (!open && trace.time_crossing_s < 0.0 && flap.position() < parameters.attach_position) {
            trace.time_crossing_s = time_s;
        }
        rising = rising || (!open && flap.attached() > before);
        if (rising && trace.time_95_s < 0.0 && flap.attached() >= 0.95) trace.time_95_s = time_s;
        before = flap.attached();
    }
    trace.last = before;
    return trace;
}

// Time in units of tau until `share` of the lift is back, by bisection on the closed form.
template <class Lift>
double time_until(double share, const Lift& lift) {
    double low = 0.0;
    double high = 100.0;
    for (int i = 0; i < 100; ++i) {
        const double mid = 0.5 * (low + high);
        (lift(mid) < share ? low : high) = mid;
    }
    return low;
}

}  // namespace

TEST_CASE("95 % of the flap's lift is back when the closed form says so") {
    FlapParameters p;
    Closing closing;
    closing.tau_chords = GENERATE(11.0, 30.0);
    const double tau_s = closing.tau_chords * p.chord_m / kAirMps;
    const double dead_s = p.dead_chords * p.chord_m / kAirMps;
    double in_taus = 0.0;
    SECTION("first order: ln 20") {
        p.shape = Reattachment::first_order;
        in_taus = std::log(20.0);
    }
    SECTION("separation point (Goman and Khrabrov 1994): ((1 + sqrt x)/2)^2 above its quarter") {
        p.shape = Reattachment::separation_point;
        in_taus = time_until(0.95, [](double t) {
            const double lift = std::pow(0.5 * (1.0 + std::sqrt(1.0 - std::exp(-t))), 2);
            return (lift - 0.25) / 0.75;
        });
        CHECK(in_taus == Approx(2.60).margin(0.01));
    }
    SECTION("slow tail: two exponentials") {
        p.shape = Reattachment::slow_tail;
        in_taus = time_until(0.95, [&](double t) {
            return 1.0 - (1.0 - p.tail_share) * std::exp(-t) - p.tail_share * std::exp(-t / p.tail_factor);
        });
    }
    const Trace trace = open_and_close(p, closing);
    CHECK(trace.time_95_s - trace.time_crossing_s == Approx(dead_s + in_taus * tau_s).margin(3.0 * kStepS));
}

TEST_CASE("an open flap has lost its lift") {
    CHECK(open_and_close(FlapParameters{}, Closing{}).least < 1e-6);
}

TEST_CASE("a flow that settles short of whole stays there") {
    Closing closing;
    closing.plateau = 0.7;
    const Trace trace = open_and_close(FlapParameters{}, closing);
    CHECK(trace.last == Approx(0.7).margin(1e-6));
    CHECK(trace.time_95_s < 0.0);
}

TEST_CASE("the flap takes its closing's time to travel, after the actuator's delay") {
    FlapParameters p;
    p.actuator_delay_s = 0.010;
    p.smooth_travel = GENERATE(false, true);
    Closing closing;
    closing.travel_s = 0.1;
    Flap flap(p);
    for (int i = 0; i < 1000; ++i) flap.step(true, closing, kAirMps, kStepS);
    REQUIRE(flap.position() == 1.0);
    double moved_s = -1.0;
    double half_s = -1.0;
    double shut_s = -1.0;
    for (int i = 1; i < 1000 && shut_s < 0.0; ++i) {
        flap.step(false, closing, kAirMps, kStepS);
        const double time_s = i * kStepS;
        if (moved_s < 0.0 && flap.position() < 1.0) moved_s = time_s;
        if (half_s < 0.0 && flap.position() <= 0.5) half_s = time_s;
        if (flap.shut()) shut_s = time_s;
    }
    CHECK(moved_s == Approx(0.010).margin(2.0 * kStepS));
    CHECK(half_s == Approx(0.060).margin(2.0 * kStepS));
    CHECK(shut_s == Approx(0.110).margin(2.0 * kStepS));
}

TEST_CASE("the flow comes back faster at higher air speed, in proportion") {
    const FlapParameters p;
    const auto time_back = [&](double air_mps) {
        Flap flap(p);
        for (int i = 0; i < 2000; ++i) flap.step(true, Closing{}, air_mps, kStepS);
        Closing at_once;
        at_once.travel_s = kStepS;
        int steps = 0;
        while (flap.attached() < 0.95 && steps < 100000) {
            flap.step(false, at_once, air_mps, kStepS);
            ++steps;
        }
        return steps * kStepS;
    };
    CHECK(time_back(30.0) == Approx(3.0 * time_back(90.0)).epsilon(0.02));
}
