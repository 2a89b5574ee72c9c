// SPDX-License-Identifier: MIT
#include "firmware_host/node/drive.hpp"

#include <filesystem>
#include <fstream>
#include <optional>
#include <stdexcept>
#include <utility>

#include "estimator/session/interrupt.hpp"
#include "firmware_host/car/car_file.hpp"
#include "firmware_host/car/outing.hpp"
#include "firmware_host/node/report.hpp"
#include "firmware_host/node/sending.hpp"
#include "firmware_host/node/uplink.hpp"
#include "proto/recording.hpp"
#include "proto/vocabulary/exit_status.hpp"

namespace holdfast::node {
namespace {

sim::Scenario scenario_of(const DriveOptions& options) {
    sim::Scenario scenario = sim::make_scenario(options.scenario, options.seed);
    if (options.laps > 0) scenario.laps = options.laps;
    for (const std::string& fault : options.faults)
        scenario.faults.push_back(sim::parse_fault(fault, scenario));
    return scenario;
}

template <class Write>
void write_file(const std::filesystem::path& path, const Write& write) {
    std::ofstream out(path, std::ios::trunc);
    write(out);
    if (!out.flush()) throw std::runtime_error(path.string() + ": cannot be written");
}

void write_truth(const std::filesystem::path& folder, const sim::Outing& outing) {
    std::filesystem::create_directories(folder);
    write_file(folder / "truth.csv", [&](std::ostream& out) { sim::write_truth_csv(out, outing.truth()); });
    write_file(folder / "truth_closures.csv",
               [&](std::ostream& out) { sim::write_truth_closures_csv(out, outing.closures()); });
}

// The ways out of the node; those that were not asked for are empty. Failures are std::runtime_error.
class Outlets {
  public:
    Outlets(const DriveOptions& options, const StreamInfo& info) {
        if (!options.record.empty()) {
            auto created = proto::RecordingWriter::create(options.record, info);
            if (!created) throw std::runtime_error(proto::to_string(created.error()));
            recording_ = std::move(*created);
        }
        if (options.link.bind.empty()) return;
        auto bound =
            link::Publisher::bind({.endpoint = options.link.bind, .when_full = options.link.when_full});
        if (!bound) throw std::runtime_error(bound.error().message);
        uplink_.emplace(std::move(*bound), info);
        tell_note("driving, " + info.origin + ", on " + uplink_->endpoint() +
                  when_it_begins(options.link.wait));
    }

    [[nodiscard]] bool wait_for_subscribers(std::size_t count) {
        return !uplink_ || uplink_->wait_for_subscribers(count);
    }

    [[nodiscard]] bool send(std::span<const Frame> frames) {
        if (recording_)
            for (const Frame& frame : frames) check(recording_->write(frame));
        if (!uplink_) return true;
        const link::SendResult result = uplink_->send(frames);
        if (result == link::SendResult::stalled)
            throw std::runtime_error("a subscriber took nothing for too long");
        return result != link::SendResult::interrupted;
    }

    void end(bool complete, const std::string& reason, const Pacer& pacer) {
        if (recording_) check(recording_->finish(complete));
        if (!uplink_) return;
        uplink_->end(complete, reason);
        tell_note(sending_report(*uplink_, pacer));
    }

  private:
    static void check(const std::optional<proto::Error>& error) {
        if (error) throw std::runtime_error(proto::to_string(*error));
    }

    std::optional<proto::RecordingWriter> recording_;
    std::optional<Uplink> uplink_;
};

}  // namespace

std::string drive_help() {
    return sim::scenario_help() +
           "\nFaults: CHANNEL:KIND:FROM_S[:MAGNITUDE[:UNTIL_S]], KIND one of stuck, drift, spikes, step, "
           "noise, gone, "
           "gaps, invalid.\n";
}

int drive(const DriveOptions& options) {
    std::optional<sim::Outing> outing;
    try {
        outing.emplace(scenario_of(options));
    } catch (const std::invalid_argument& error) {
        tell_error(error.what());
        return kWrongUse;
    }
    session::note_interrupts();
    if (!options.car.empty())
        write_file(options.car, [&](std::ostream& out) { out << sim::car_file_text(outing->scenario()); });

    Outlets outlets(options, outing->info());
    SteadyTime time;
    Pacer pacer(options.link.bind.empty() ? 0.0 : options.link.pace, time);
    if (outlets.wait_for_subscribers(options.link.wait))
        send_all([&](Frame& frame) { return outing->next(frame); },
                 batch_rule(pacer.pace(), options.link.batch_ms), pacer,
                 [&](std::span<const Frame> frames) { return outlets.send(frames); });

    const std::string reason = session::interrupted() ? session::interrupt_reason() : std::string{};
    outlets.end(reason.empty(), reason, pacer);
    if (!options.truth.empty()) write_truth(options.truth, *outing);
    if (!reason.empty()) tell_error(reason);
    return reason.empty() ? kDone : kIncomplete;
}

}  // namespace holdfast::node
