// SPDX-License-Identifier: MIT
// Random numbers that are the same on every machine: std::mt19937_64 is defined to the bit by the standard,
// the distributions of <random> are not, so uniform and normal are made here.
#pragma once

#include <cmath>
#include <cstdint>
#include <random>

namespace holdfast::sim {

// What a generator is for. Each use has its own stream, so that a change to one (more sensors, say) leaves
// the road, the wind and the driver as they were.
enum class Stream : std::uint64_t {
    car = 1,
    circuit,
    road_lap,
    road_fresh,
    wind,
    driver,
    flap,
    sensors,
    workshop
};

class Random {
  public:
    Random(std::uint64_t seed, Stream stream)
        : engine_(mix(mix(seed) + 0x9E3779B97F4A7C15ULL * static_cast<std::uint64_t>(stream))) {}

    // Uniform in [0, 1), 53 bits.
    double uniform() { return static_cast<double>(engine_() >> 11) * 0x1.0p-53; }
    double uniform(double least, double most) { return least + (most - least) * uniform(); }

    // Standard normal by the polar method (Marsaglia and Bray 1964).
    double normal() {
        if (has_spare_) {
            has_spare_ = false;
            return spare_;
        }
        double u = 0.0;
        double v = 0.0;
        double s = 0.0;
        do {
            u = 2.0 * uniform() - 1.0;
            v = 2.0 * uniform() - 1.0;
            s = u * u + v * v;
        } while (s >= 1.0 || s == 0.0);
        const double scale = std::sqrt(-2.0 * std::log(s) / s);
        spare_ = v * scale;
        has_spare_ = true;
        return u * scale;
    }
    double normal(double mean, double sd) { return mean + sd * normal(); }

    bool happens(double probability) { return uniform() < probability; }

  private:
    // SplitMix64's finaliser (Steele, Lea and Flood 2014): neighbouring seeds give unrelated states.
    static std::uint64_t mix(std::uint64_t x) {
        x += 0x9E3779B97F4A7C15ULL;
        x = (x ^ (x >> 30)) * 0xBF58476D1CE4E5B9ULL;
        x = (x ^ (x >> 27)) * 0x94D049BB133111EBULL;
        return x ^ (x >> 31);
    }

    std::mt19937_64 engine_;
    double spare_ = 0.0;
    bool has_spare_ = false;
};

}  // namespace holdfast::sim
