// SPDX-License-Identifier: MIT
#include "tests/end_to_end/logs.hpp"

#include <nlohmann/json.hpp>
#include <stdexcept>

#include "estimator/session/csv_writer.hpp"
#include "estimator/session/log_source.hpp"
#include "tests/end_to_end/process.hpp"

namespace holdfast::testing {

std::string demo_log() {
    return HOLDFAST_SOURCE_DIR "/replay_logs/demo/outing.hfr";
}
std::string demo_car() {
    return HOLDFAST_SOURCE_DIR "/replay_logs/demo/car.toml";
}

std::vector<std::string> live_words(const std::string& endpoint, const std::string& out) {
    return {"live", "--from", endpoint, "--car", demo_car(), "--out", out};
}

std::string first_seconds(double seconds, const TempFolder& folder) {
    const std::string path = folder / "first.csv";
    auto source = session::open_log(demo_log(), {});
    if (!source) throw std::runtime_error(session::to_string(source.errors()));
    auto writer = session::CsvWriter::create(path, (*source)->info());
    if (!writer) throw std::runtime_error(session::to_string(writer.errors()));
    Frame frame;
    while ((*source)->next(frame) && frame.time_s() < seconds)
        if (const auto error = writer->write(frame)) throw std::runtime_error(session::to_string(*error));
    if (const auto error = writer->finish()) throw std::runtime_error(session::to_string(*error));
    return path;
}

Completeness completeness(const std::filesystem::path& results) {
    const auto summary = nlohmann::json::parse(read_file(results / "summary.json"));
    Completeness c;
    c.complete = summary.at("complete").get<bool>();
    if (!c.complete) c.reason = summary.at("incomplete_reason").get<std::string>();
    c.closings = summary.at("closures").at("total").get<std::size_t>();
    return c;
}

}  // namespace holdfast::testing
