// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <cmath>
#include <complex>
#include <numbers>

#include "firmware_host/car/aero.hpp"
#include "firmware_host/car/road.hpp"
#include "firmware_host/car/wind.hpp"

namespace {

using namespace holdfast::sim;

constexpr std::uint64_t kSeed = 20240611;

// One-sided spectral density of a profile at one wave number, Hann window, averaged over stretches.
double spectrum(const std::vector<double>& profile, double cell_m, double cycles_per_m, std::size_t stretch) {
    double sum = 0.0;
    int stretches = 0;
    for (std::size_t begin = 0; begin + stretch <= profile.size(); begin += stretch, ++stretches) {
        double mean = 0.0;
        for (std::size_t i = 0; i < stretch; ++i) mean += profile[begin + i];
        mean /= static_cast<double>(stretch);
        std::complex<double> line = 0.0;
        double window_energy = 0.0;
        for (std::size_t i = 0; i < stretch; ++i) {
            const double turn = 2.0 * std::numbers::pi * static_cast<double>(i);
            const double window = 0.5 - 0.5 * std::cos(turn / static_cast<double>(stretch));
            line += window * (profile[begin + i] - mean) * std::polar(1.0, -turn * cycles_per_m * cell_m);
            window_energy += window * window;
        }
        sum += 2.0 * std::norm(line) * cell_m / window_energy;
    }
    return sum / stretches;
}

}  // namespace

TEST_CASE("air density is CIPM-2007's") {
    // 20 degC, 101325 Pa, 50 %: computed from Picard et al., Metrologia 45 (2008).
    AirParameters air;
    air.temperature_k = 293.15;
    air.pressure_pa = 101325.0;
    air.relative_humidity = 0.5;
    CHECK(air_density(air) == Approx(1.1993139).epsilon(2e-6));
    // 10 degC, 730 mmHg, 40 %: the table that goes with the formula, at second hand.
    air.temperature_k = 283.15;
    air.pressure_pa = 730.0 * 133.322387;
    air.relative_humidity = 0.4;
    CHECK(air_density(air) == Approx(1.19569).epsilon(1e-4));
}

TEST_CASE("losing the flap's flow takes its area off the rear and gives the front what the overhang lifts") {
    const AeroParameters aero;
    FlapParameters flap;
    const Areas whole = areas(aero, flap, 3.4, 0.03, 0.07, 0.0, 1.0);
    const Areas lost = areas(aero, flap, 3.4, 0.03, 0.07, 0.0, 0.0);
    CHECK(whole.rear_m2 - lost.rear_m2 == Approx(flap.area_m2));
    CHECK(lost.front_m2 - whole.front_m2 == Approx(flap.area_m2 * 0.6 / 4.0));
    CHECK(lost.drag_m2 < 0.92 * whole.drag_m2);
}

TEST_CASE("areas have a smooth optimum in ride height") {
    const AeroParameters aero;
    const auto front = [&](double height_m) {
        return areas(aero, {}, 3.4, height_m, 0.06, 0.0, 1.0).front_m2;
    };
    const double best = front(aero.front.best_height_m);
    CHECK(best == Approx(aero.front.area_m2 * (1.0 + aero.front.gain)));
    CHECK(front(aero.front.best_height_m + 0.02) < best);
    CHECK(front(aero.front.best_height_m - 0.02) < best);
}

TEST_CASE("the road has the spectrum of ISO 8608, seed 20240611") {
    RoadParameters p;
    p.roughness_m3 = 4e-6;
    p.patch_m = 1e-3;
    p.longest_wave_m = 1000.0;
    p.repeat_share = 0.5;
    constexpr double kLapM = 5000.0;
    Road road(p, {}, kLapM, 5.0, 1.0, kSeed);
    std::vector<double> left;
    std::vector<double> right;
    for (double s = 0.0; s < 8.0 * kLapM; s += Road::kCellM) {
        road.advance_to(s);
        left.push_back(road.left_m(s));
        right.push_back(road.right_m(s));
    }
    for (const double n : {0.1, 0.3, 1.0}) {
        CAPTURE(n);
        // 400 stretches of 100 m, half of them repeated by the lap: 7 % standard deviation.
        const double expected = p.roughness_m3 * std::pow(0.1 / n, 2);
        CHECK(spectrum(left, Road::kCellM, n, 2000) == Approx(expected).epsilon(0.25));
        CHECK(spectrum(right, Road::kCellM, n, 2000) == Approx(expected).epsilon(0.25));
    }
    // Steps over half a metre: the same level again, and left like right as far as asked.
    double ll = 0.0;
    double lr = 0.0;
    double rr = 0.0;
    double lap_lap = 0.0;
    const auto lap_cells = static_cast<std::size_t>(kLapM / Road::kCellM);
    std::size_t count = 0;
    for (std::size_t i = 0; i + lap_cells + 10 < left.size(); i += 10, ++count) {
        const double dl = left[i + 10] - left[i];
        const double dr = right[i + 10] - right[i];
        ll += dl * dl;
        rr += dr * dr;
        lr += dl * dr;
        lap_lap += dl * (left[i + lap_cells + 10] - left[i + lap_cells]);
    }
    const double step_variance = 2.0 * std::pow(std::numbers::pi * 0.1, 2) * p.roughness_m3 * 0.5;
    CHECK(ll / static_cast<double>(count) == Approx(step_variance).epsilon(0.05));
    CHECK(lr / std::sqrt(ll * rr) == Approx(p.left_right_correlation).margin(0.03));
    CHECK(lap_lap / ll == Approx(p.repeat_share).margin(0.03));
}

TEST_CASE("the rear axle meets what the front axle met, and a kerb is as high as it was built") {
    RoadParameters p;
    p.roughness_m3 = 1e-6;
    Road road(p, {{100.0, 2.0, 0.02, true}}, 1000.0, 5.0, 1.0, kSeed);
    RoadParameters level = p;
    level.roughness_m3 = 0.0;
    Road kerb_only(level, {{100.0, 2.0, 0.02, true}}, 1000.0, 5.0, 1.0, kSeed);
    road.advance_to(101.0);
    kerb_only.advance_to(101.0);
    const double met = road.left_m(101.0);
    road.advance_to(104.5);
    CHECK(road.left_m(101.0) == met);
    CHECK(kerb_only.left_m(101.0) == Approx(0.02).margin(1e-4));
    CHECK(kerb_only.right_m(101.0) == 0.0);
}

TEST_CASE("gusts have their standard deviation and their memory, seed 20240611") {
    AirParameters air;
    air.wind_mps = 3.0;
    air.wind_from_rad = 0.0;
    air.gust_sd_mps = 0.8;
    air.gust_time_s = 1.2;
    Wind wind(air, kSeed);
    constexpr double kStepS = 0.05;
    constexpr int kSteps = 400000;
    double sum2 = 0.0;
    double lagged = 0.0;
    double before = wind.head_mps(0.0) - 3.0;
    for (int i = 0; i < kSteps; ++i) {
        wind.step(kStepS);
        const double gust = wind.head_mps(0.0) - 3.0;
        sum2 += gust * gust;
        lagged += gust * before;
        before = gust;
    }
    CHECK(std::sqrt(sum2 / kSteps) == Approx(0.8).epsilon(0.02));
    CHECK(lagged / sum2 == Approx(std::exp(-kStepS / air.gust_time_s)).margin(0.002));
    // From the north: against a car that drives north, behind one that drives south.
    CHECK(wind.head_mps(0.0) - wind.head_mps(std::numbers::pi) == Approx(6.0));
}
