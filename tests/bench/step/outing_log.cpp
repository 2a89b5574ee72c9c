// SPDX-License-Identifier: MIT
#include "tests/bench/step/outing_log.hpp"

#include <fstream>
#include <stdexcept>

#include "estimator/session/csv_writer.hpp"
#include "estimator/session/log_source.hpp"
#include "firmware_host/car/car_file.hpp"
#include "firmware_host/car/outing.hpp"

namespace holdfast::bench {
namespace {

constexpr const char* kScenario = "open_wheel";
constexpr std::uint64_t kSeed = 1;
constexpr std::int64_t kLength_ns = 90'000'000'000;

template <class T>
T value_of(session::Result<T> result) {
    if (!result) throw std::runtime_error(session::to_string(result.errors()));
    return std::move(*result);
}

void check(const std::optional<session::Error>& error) {
    if (error) throw std::runtime_error(session::to_string(*error));
}

}  // namespace

double OutingLog::duration_s() const {
    return frames.back().time_s() - frames.front().time_s();
}

OutingLog read_outing(const std::string& log, const std::string& car_file) {
    OutingLog out;
    out.path = log;
    out.car_file = value_of(session::read_car_file(car_file));
    const auto source = value_of(session::open_log(log, session::LogOptions{}));
    out.stream = source->info();
    out.bound = value_of(session::bind_ride_heights(out.car_file, out.stream));
    const session::FrameAdapter adapter(out.bound.car);
    Frame frame;
    while (source->next(frame)) {
        adapter.apply(frame);
        out.frames.push_back(frame);
    }
    check(source->error());
    if (out.frames.size() < 2) throw std::runtime_error(log + ": a log of two rows at least was expected");
    return out;
}

void simulate_outing(const std::string& folder) {
    sim::Outing outing(sim::make_scenario(kScenario, kSeed));
    std::ofstream(folder + "/car.toml") << sim::car_file_text(outing.scenario());
    auto writer = value_of(session::CsvWriter::create(folder + "/log.csv.gz", outing.info()));
    for (Frame frame; outing.next(frame) && frame.time_ns <= kLength_ns; frame = Frame{})
        check(writer.write(frame));
    check(writer.finish());
}

}  // namespace holdfast::bench
