// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <cmath>

#include "firmware_host/car/sensors.hpp"

namespace {

using namespace holdfast;
using namespace holdfast::sim;

constexpr std::uint64_t kSeed = 99;
constexpr double kFrameHz = 400.0;

SensorTable only(Channel channel, const SensorParameters& sensor) {
    SensorTable table{};
    table[index(channel)] = sensor;
    table[index(channel)].fitted = true;
    return table;
}

struct Reading {
    double time_s;
    double value;
};

// Readings of load_rl over `seconds`, the true value being `truth(time)`.
template <class Truth>
std::vector<Reading> readings(const SensorParameters& sensor, const std::vector<Fault>& faults,
                              double seconds, const Truth& truth) {
    Sensors sensors(only(Channel::load_rl, sensor), faults, kFrameHz, kSeed);
    std::vector<Reading> result;
    for (std::int64_t tick = 0; static_cast<double>(tick) < seconds * kFrameHz; ++tick) {
        const double time_s = static_cast<double>(tick) / kFrameHz;
        TrueValues now{};
        now[index(Channel::load_rl)] = truth(time_s);
        Frame frame;
        sensors.read(tick, now, frame);
        CHECK((frame.present & ~(std::uint64_t{1} << index(Channel::load_rl))) == 0);
        if (frame.has(Channel::load_rl)) result.push_back({time_s, frame.get(Channel::load_rl)});
    }
    return result;
}

double constant(double) {
    return 1000.0;
}

Fault fault(FaultKind kind, double magnitude = 0.0) {
    return {.channel = Channel::load_rl, .kind = kind, .from_s = 2.0, .until_s = 4.0, .magnitude = magnitude};
}

bool during(const Reading& r) {
    return r.time_s >= 2.0 && r.time_s < 4.0;
}

}  // namespace

TEST_CASE("noise, gain, offset and drift are what was asked for, seed 99") {
    SensorParameters sensor;
    sensor.noise_sd = 25.0;
    sensor.gain_error = 0.02;
    sensor.offset = -30.0;
    sensor.drift_per_s = 0.5;
    const auto got = readings(sensor, {}, 100.0, constant);
    REQUIRE(got.size() == 40000);
    double mean = 0.0;
    double variance = 0.0;
    double against_time = 0.0;
    for (const Reading& r : got) {
        const double error = r.value - (1.02 * 1000.0 - 30.0 + 0.5 * r.time_s);
        mean += error;
        variance += error * error;
        against_time += error * (r.time_s - 50.0);
    }
    const auto count = static_cast<double>(got.size());
    CHECK(mean / count == Approx(0.0).margin(4.0 * 25.0 / std::sqrt(count)));
    CHECK(std::sqrt(variance / count) == Approx(25.0).epsilon(0.015));
    CHECK(against_time / count == Approx(0.0).margin(4.0 * 25.0 * 29.0 / std::sqrt(count)));
}

TEST_CASE("slower sensors leave frames without a sample of theirs") {
    SensorParameters sensor;
    sensor.rate_hz = 100.0;
    sensor.first_s = 0.0075;
    const auto got = readings(sensor, {}, 1.0, constant);
    REQUIRE(got.size() == 100);
    CHECK(got[0].time_s == Approx(0.0075));
    CHECK(got[1].time_s == Approx(0.0175));
    sensor.rate_hz = 33.0;  // does not divide the frame rate: the average holds
    sensor.first_s = 0.0;
    CHECK(readings(sensor, {}, 10.0, constant).size() == 330);
}

TEST_CASE("readings are rounded to the resolution") {
    SensorParameters sensor;
    sensor.noise_sd = 3.0;
    sensor.resolution = 0.5;
    for (const Reading& r : readings(sensor, {}, 1.0, constant)) CHECK(std::fmod(r.value, 0.5) == 0.0);
}

TEST_CASE("a late sensor says what was true then") {
    SensorParameters sensor;
    sensor.latency_s = 0.0213;
    const auto ramp = [](double t) { return 200.0 * t; };
    for (const Reading& r : readings(sensor, {}, 2.0, ramp)) {
        if (r.time_s > 0.1) CHECK(r.value == Approx(200.0 * (r.time_s - 0.0213)).margin(1e-9));
    }
}

TEST_CASE("a random walk spreads with the root of time, seed 99") {
    SensorParameters sensor;
    sensor.walk_per_sqrt_s = 2.0;
    const auto got = readings(sensor, {}, 400.0, constant);
    double sum2 = 0.0;
    int count = 0;
    for (std::size_t i = 400; i < got.size(); i += 400, ++count) {
        sum2 += std::pow(got[i].value - got[i - 400].value, 2);  // over 1 s
    }
    CHECK(std::sqrt(sum2 / count) == Approx(2.0).epsilon(0.12));
}

TEST_CASE("each fault spoils its channel from its beginning to its end") {
    SensorParameters sensor;
    sensor.noise_sd = 1.0;
    const auto sound = readings(sensor, {}, 6.0, constant);
    SECTION("stuck") {
        const auto got = readings(sensor, {fault(FaultKind::stuck)}, 6.0, constant);
        for (const Reading& r : got) {
            if (during(r)) CHECK(r.value == got[800].value);
        }
        CHECK(got[1601].value != got[800].value);
    }
    SECTION("drift") {
        const auto got = readings(sensor, {fault(FaultKind::drift, 50.0)}, 6.0, constant);
        for (std::size_t i = 0; i < got.size(); ++i) {
            const double added = during(got[i]) ? 50.0 * (got[i].time_s - 2.0) : 0.0;
            CHECK(got[i].value == Approx(sound[i].value + added));
        }
    }
    SECTION("step") {
        const auto got = readings(sensor, {fault(FaultKind::step, -400.0)}, 6.0, constant);
        for (std::size_t i = 0; i < got.size(); ++i) {
            CHECK(got[i].value == Approx(sound[i].value - (during(got[i]) ? 400.0 : 0.0)));
        }
    }
    SECTION("spikes") {
        int spikes = 0;
        for (const Reading& r : readings(sensor, {fault(FaultKind::spikes, 900.0)}, 6.0, constant)) {
            const bool spike = std::abs(std::abs(r.value - 1000.0) - 900.0) < 10.0;
            spikes += spike ? 1 : 0;
            CHECK((during(r) || !spike));
        }
        CHECK(spikes > 4);
        CHECK(spikes < 40);
    }
    SECTION("noise") {
        double sum2 = 0.0;
        for (const Reading& r : readings(sensor, {fault(FaultKind::noise, 60.0)}, 6.0, constant)) {
            if (during(r)) sum2 += std::pow(r.value - 1000.0, 2);
        }
        CHECK(std::sqrt(sum2 / 800.0) == Approx(60.0).epsilon(0.1));
    }
    SECTION("gone") {
        for (const Reading& r : readings(sensor, {fault(FaultKind::gone)}, 6.0, constant)) CHECK(!during(r));
    }
    SECTION("gaps") {
        const auto got = readings(sensor, {fault(FaultKind::gaps, 0.25)}, 6.0, constant);
        CHECK(got.size() == Approx(2400.0 - 200.0).margin(50.0));
    }
    SECTION("invalid") {
        for (const Reading& r : readings(sensor, {fault(FaultKind::invalid)}, 6.0, constant)) {
            CHECK(std::isnan(r.value) == during(r));
        }
    }
}

TEST_CASE("the generator is the standard's and its normals are normal") {
    // The C++ standard fixes the 10000th number of a default mt19937_64 ([rand.predef]).
    std::mt19937_64 engine;
    engine.discard(9999);
    CHECK(engine() == 9981545732273789042ULL);
    Random random(kSeed, Stream::sensors);
    double sum = 0.0;
    double sum2 = 0.0;
    double sum4 = 0.0;
    constexpr int kDraws = 400000;
    for (int i = 0; i < kDraws; ++i) {
        const double x = random.normal();
        sum += x;
        sum2 += x * x;
        sum4 += x * x * x * x;
    }
    CHECK(sum / kDraws == Approx(0.0).margin(0.007));
    CHECK(sum2 / kDraws == Approx(1.0).margin(0.01));
    CHECK(sum4 / kDraws == Approx(3.0).margin(0.08));
}
