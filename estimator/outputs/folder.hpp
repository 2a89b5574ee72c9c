// SPDX-License-Identifier: MIT
// The folder of an outing's results: closures.csv, estimates.csv, zones.csv, summary.json. The files hold
// whole lines at every moment; summary.json says "complete": false from the start and is replaced at the end,
// so that a program that was killed leaves a folder that tells so.
#pragma once

#include <cstdint>
#include <filesystem>
#include <map>
#include <string>
#include <utility>
#include <vector>

#include "estimator/outputs/areas.hpp"
#include "estimator/outputs/line_file.hpp"
#include "estimator/outputs/sink.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::outputs {

// What the files say about where they come from.
struct Outing {
    std::string log{};  // file or endpoint
    std::string car_name{};
    std::string car_file{};
    double flap_chord_m = 0.0;
    double rate_hz = 0.0;  // of estimates.csv
    StreamInfo stream{};   // for the names of the ride heights
};

// Counters of a live link, by name, in the order of their showing.
using LinkCounters = std::vector<std::pair<std::string, std::uint64_t>>;

struct ClosureCounts {
    std::uint64_t full = 0;  // verdict at brake onset
    std::uint64_t short_of = 0;
    std::uint64_t unclear = 0;
    std::uint64_t no_braking = 0;  // no verdict: nothing to judge it at
    std::uint64_t slow = 0;        // of all, whatever the verdict
};

// What has been gathered over the outing for its summary.
struct Tally {
    Areas areas;
    std::vector<core::Closure> closures;
    std::map<core::AlarmKind, std::uint64_t> alarms;
    core::HealthTable health{};
    std::uint64_t estimates = 0;
    std::uint64_t ground_reference = 0;  // estimates whose areas refer to ground speed
    std::uint64_t standard_air = 0;      // estimates with the standard atmosphere's density

    [[nodiscard]] ClosureCounts counts() const;
    // By the greater part of the outing: a pitot or weather station that came and went is told by its health.
    [[nodiscard]] bool refers_to_ground() const { return estimates > 0 && 2 * ground_reference >= estimates; }
    [[nodiscard]] bool in_standard_air() const { return estimates > 0 && 2 * standard_air >= estimates; }
};

// The text of summary.json.
[[nodiscard]] std::string summary_json(const Outing& outing, const Tally& tally, const RunEnd& end,
                                       const LinkCounters& link);

class Folder : public Sink {
  public:
    // Makes the folder where it is missing and replaces the files of an earlier run. Throws
    // std::runtime_error naming what could not be written.
    Folder(const std::filesystem::path& path, Outing outing);

    void on_estimate(const core::Estimate& estimate) override;
    void on_closure(const core::Closure& closure) override;
    void on_alarm(const core::Alarm& alarm) override;
    void on_health(std::int64_t time_ns, const core::HealthTable& health) override;
    void on_end(const RunEnd& end) override;

    // Live only: to be told before the end.
    void set_link_counters(LinkCounters counters) { link_ = std::move(counters); }

    [[nodiscard]] const std::filesystem::path& path() const { return path_; }
    [[nodiscard]] const Outing& outing() const { return outing_; }
    [[nodiscard]] const Tally& tally() const { return tally_; }
    [[nodiscard]] const LinkCounters& link_counters() const { return link_; }  // empty where there is no link
    // The summary as last written.
    [[nodiscard]] const std::string& summary() const { return summary_; }

  private:
    void write_summary(const RunEnd& end);

    std::filesystem::path path_;
    Outing outing_;
    LineFile closures_;
    LineFile estimates_;
    LinkCounters link_;
    Tally tally_;
    std::string summary_;
};

}  // namespace holdfast::outputs
