// SPDX-License-Identifier: MIT
#include "estimator/outputs/folder.hpp"

#include <stdexcept>
#include <system_error>

#include "estimator/outputs/tables.hpp"
#include "estimator/outputs/zones.hpp"

namespace holdfast::outputs {
namespace {

std::filesystem::path made(const std::filesystem::path& path) {
    std::error_code error;
    std::filesystem::create_directories(path, error);
    if (error) throw std::runtime_error(path.string() + ": cannot make this folder: " + error.message());
    return path;
}

}  // namespace

ClosureCounts Tally::counts() const {
    ClosureCounts n;
    for (const core::Closure& c : closures) {
        if (c.slow) ++n.slow;
        if (!c.braked) {
            ++n.no_braking;
        } else if (c.verdict == core::Verdict::full) {
            ++n.full;
        } else if (c.verdict == core::Verdict::short_of) {
            ++n.short_of;
        } else {
            ++n.unclear;
        }
    }
    return n;
}

Folder::Folder(const std::filesystem::path& path, Outing outing)
    : path_(made(path)),
      outing_(std::move(outing)),
      closures_(path_ / "closures.csv", LineFile::Flush::each_line),
      estimates_(path_ / "estimates.csv", LineFile::Flush::by_block) {
    closures_.add(closures_header());
    estimates_.add(estimates_header());
    estimates_.flush();
    write_whole(path_ / "zones.csv", zones_csv({}));
    write_summary({.complete = false, .reason = "the run has not come to its end"});
}

void Folder::on_estimate(const core::Estimate& estimate) {
    ++tally_.estimates;
    if ((estimate.flags & core::kGroundReference) != 0) ++tally_.ground_reference;
    if ((estimate.flags & core::kStandardAir) != 0) ++tally_.standard_air;
    tally_.areas.add(estimate);
    estimates_.add(estimate_row(estimate));
}

void Folder::on_closure(const core::Closure& closure) {
    tally_.closures.push_back(closure);
    closures_.add(closure_row(closure, outing_.flap_chord_m));
}

void Folder::on_alarm(const core::Alarm& alarm) {
    ++tally_.alarms[alarm.kind];
}

void Folder::on_health(std::int64_t /*time_ns*/, const core::HealthTable& health) {
    tally_.health = health;
}

void Folder::on_end(const RunEnd& end) {
    closures_.flush();
    estimates_.flush();
    write_whole(path_ / "zones.csv", zones_csv(zones(tally_.closures)));
    write_summary(end);
}

void Folder::write_summary(const RunEnd& end) {
    summary_ = summary_json(outing_, tally_, end, link_);
    write_whole(path_ / "summary.json", summary_);
}

}  // namespace holdfast::outputs
