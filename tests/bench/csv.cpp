// SPDX-License-Identifier: MIT
// How fast a CSV log is read: an outing of 309 s at 400 Hz with 21 columns at their own rates, plain, gzip
// and zstd.
//   bench_csv         makes the log itself (no meaning in its numbers, only their usual lengths and blanks)
//   bench_csv LOG...  reads these instead
#include <stdlib.h>

#include <algorithm>
#include <chrono>
#include <cmath>
#include <cstdio>
#include <filesystem>
#include <iostream>
#include <string>
#include <vector>

#include "estimator/session/byte_sink.hpp"
#include "estimator/session/log_source.hpp"

namespace {

using namespace holdfast;

constexpr int kRows = 309 * 400;

struct Column {
    const char* header;
    const char* format;
    double middle;
    double swing;
    int every;  // rows from one sample to the next
};

const Column kColumns[] = {
    {"lap[-]", "%.0f", 4, 3, 40},
    {"lap_distance[m]", "%.4f", 2500, 2400, 4},
    {"speed[m/s]", "%.3f", 55, 35, 4},
    {"accel_x[m/s^2]", "%.3f", 0, 20, 1},
    {"accel_y[m/s^2]", "%.3f", 0, 20, 1},
    {"brake_pressure[bar]", "%.4f", 40, 40, 4},
    {"throttle[%]", "%.3f", 50, 50, 4},
    {"drive_force[N]", "%.0f", 4000, 4000, 4},
    {"flap_command[-]", "%.0f", 0.5, 0.5, 1},
    {"flap_position[%]", "%.2f", 50, 50, 1},
    {"ride_height_front[mm]", "%.3f", 35, 10, 1},
    {"ride_height_rear_left[mm]", "%.3f", 80, 15, 1},
    {"ride_height_rear_right[mm]", "%.3f", 80, 15, 1},
    {"load_fl[N]", "%.1f", 3000, 1000, 1},
    {"load_fr[N]", "%.1f", 3000, 1000, 1},
    {"load_rl[N]", "%.1f", 4000, 1500, 1},
    {"load_rr[N]", "%.1f", 4000, 1500, 1},
    {"air_temperature[degC]", "%.1f", 24, 1, 400},
    {"air_pressure[hPa]", "%.1f", 1003, 1, 400},
    {"relative_humidity[%]", "%.0f", 48, 2, 400},
};

std::string make_log() {
    std::string text = "t[s]";
    for (const Column& column : kColumns) text += std::string(",") + column.header;
    text += "\n";
    char number[40];
    for (int row = 0; row < kRows; ++row) {
        std::snprintf(number, sizeof number, "%.4f", row / 400.0);
        text += number;
        for (const Column& column : kColumns) {
            text += ',';
            if (row % column.every != 0) continue;
            std::snprintf(number, sizeof number, column.format,
                          column.middle + column.swing * std::sin(0.37 * row));
            text += number;
        }
        text += '\n';
    }
    return text;
}

void measure(const std::string& path) {
    constexpr int kRuns = 5;
    double best_s = 1e9;
    std::size_t rows = 0;
    std::size_t samples = 0;
    for (int run = 0; run < kRuns; ++run) {
        const auto start = std::chrono::steady_clock::now();
        auto log = session::open_log(path, {});
        if (!log) {
            std::cerr << session::to_string(log.errors());
            return;
        }
        rows = samples = 0;
        Frame frame;
        while ((*log)->next(frame)) {
            ++rows;
            samples += static_cast<std::size_t>(__builtin_popcountll(frame.present)) + 1;  // t is one
        }
        if ((*log)->error()) std::cerr << session::to_string(*(*log)->error()) << "\n";
        best_s =
            std::min(best_s, std::chrono::duration<double>(std::chrono::steady_clock::now() - start).count());
    }
    std::printf("%-60s %8.1f ms   %7zu rows   %5.1f M samples/s   %6.1f MB/s of file\n", path.c_str(),
                1e3 * best_s, rows, 1e-6 * static_cast<double>(samples) / best_s,
                1e-6 * static_cast<double>(std::filesystem::file_size(path)) / best_s);
}

}  // namespace

int main(int argc, char** argv) {
    if (argc > 1) {
        for (int i = 1; i < argc; ++i) measure(argv[i]);
        return 0;
    }
    std::string folder = (std::filesystem::temp_directory_path() / "bench_csv_XXXXXX").string();
    if (::mkdtemp(folder.data()) == nullptr) return 1;
    const std::string text = make_log();
    for (const char* name : {"/log.csv", "/log.csv.gz", "/log.csv.zst"}) {
        auto sink = session::ByteSink::create(folder + name);
        if (!sink || (*sink)->write(text) || (*sink)->finish()) return 1;
        measure(folder + name);
    }
    std::filesystem::remove_all(folder);
    return 0;
}
