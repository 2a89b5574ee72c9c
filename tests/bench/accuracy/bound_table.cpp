// SPDX-License-Identifier: MIT
// What the data of one closing allow at best: the Cramer-Rao bound of the time constant, for a light car with
// three ride-height sensors, by speed, time constant and time to the brakes.
//   bench_bound [LOAD_NOISE_N [HEIGHT_NOISE_MM [RATE_HZ]]]   noise of one sensor; 50, 0.25, 400 where not
//   given
#include <cstdio>
#include <cstdlib>

#include "tests/bench/accuracy/bound.hpp"

int main(int argc, char** argv) {
    using namespace holdfast;
    const auto argument = [&](int i, double otherwise) { return argc > i ? std::atof(argv[i]) : otherwise; };
    const double load_n = argument(1, 50.0);
    const double height_m = 1e-3 * argument(2, 0.25);
    const double rate_hz = argument(3, 400.0);
    if (!(load_n > 0.0 && height_m > 0.0 && rate_hz >= 50.0)) {
        std::fprintf(stderr, "bench_bound: expected noises above 0 and a rate of at least 50 Hz\n");
        return 1;
    }
    bench::KnownClosing closing;
    core::Car& car = closing.car;
    car.mass_kg.value = 800.0;
    car.wheelbase_m = 3.4;
    car.front_weight_share.value = 0.455;
    car.cg_height_m.value = 0.30;
    car.pitch_inertia_kgm2.value = 1100.0;
    car.front.unsprung_mass_kg.value = 19.0;
    car.rear.unsprung_mass_kg.value = 22.0;
    car.ride_height[0].x_m = 0.25;
    car.ride_height[1] = {{}, -3.5, 0.45, ride_height_channel(1)};
    car.ride_height[2] = {{}, -3.5, -0.45, ride_height_channel(2)};
    car.ride_height_count = 3;
    closing.step_s = 1.0 / rate_hz;
    closing.load_noise_n2s = 2.0 * load_n * load_n / rate_hz;
    closing.height_noise_m2s = height_m * height_m / rate_hz;
    std::printf("loads %.0f N, ride heights %.2f mm, %.0f Hz, flap %.2f m2: bound of tau, ms\n", load_n,
                1e3 * height_m, rate_hz, closing.flap_rear_m2);
    std::printf("speed m/s  tau ms | until brakes after 50  100  200  400 ms | until 1 s\n");
    for (const double speed_mps : {60.0, 75.0, 90.0}) {
        for (const double tau_ms : {20.0, 35.0, 60.0, 110.0, 160.0}) {
            closing.speed_mps = speed_mps;
            closing.tau_s = 1e-3 * tau_ms;
            std::printf("%9.0f %7.0f |                ", speed_mps, tau_ms);
            for (const double brakes_s : {0.05, 0.1, 0.2, 0.4}) {
                closing.brakes_s = brakes_s;
                std::printf(" %6.1f", 1e3 * bench::tau_bound(closing).until_brakes_s);
            }
            std::printf(" | %6.1f\n", 1e3 * bench::tau_bound(closing).until_one_second_s);
        }
    }
    return 0;
}
