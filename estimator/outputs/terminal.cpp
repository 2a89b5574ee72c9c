// SPDX-License-Identifier: MIT
#include "estimator/outputs/terminal.hpp"

#include <algorithm>
#include <chrono>
#include <optional>
#include <ostream>

#include "estimator/outputs/text.hpp"
#include "estimator/outputs/words.hpp"

namespace holdfast::outputs {
namespace {

constexpr std::chrono::milliseconds kStatusPeriod{100};

std::string with_sd(const core::Quantity& q, int decimals) {
    return fixed(q.value, decimals) + " ± " + fixed(q.sd, decimals);
}

// Two figures, and never as a certainty.
std::string probability(double p) {
    return p > 0.99 ? "> 0.99" : fixed(p, 2);
}

std::string milliseconds(double seconds) {
    return fixed(seconds * 1e3, 0);
}

std::string reattachment(const core::Closure& c) {
    if (!c.reattachment_known) return "reattachment unknown (data missing)";
    if (!c.whole)
        return "the flow settles at " + fixed(c.plateau * 100.0, 0) + " % of the flap's downforce, not whole";
    return "95 % back " + milliseconds(c.t95_s) + " ms after shut (95 % interval " +
           milliseconds(c.t95_low_s) + " to " + milliseconds(c.t95_high_s) + " ms)";
}

std::string at_brakes(const core::Closure& c) {
    if (!c.braked) return "no braking followed";
    if (!c.reattachment_known) return "downforce at the brakes unknown";
    std::string text;
    if (c.whole) text = "margin " + with_sd(c.margin_s, 3) + " s; ";
    return text + with_sd(c.shortfall_n, 0) + " N missing at the brakes: " + std::string(word(c.verdict));
}

std::string area_line(const char* name, const AreaMeans& means) {
    const auto text = [](const WeightedMean& mean) {
        const std::optional<core::Quantity> q = mean.mean();
        return q ? with_sd(*q, 3) : std::string("unknown");
    };
    return std::string("  ") + name + ": front " + text(means.cla_front_m2) + ", rear " +
           text(means.cla_rear_m2) + ", drag " + text(means.cda_m2) + " m²\n";
}

std::string closings_line(const Tally& tally) {
    const ClosureCounts n = tally.counts();
    return "  closings of the flap: " + std::to_string(tally.closures.size()) + "; at the brakes full " +
           std::to_string(n.full) + ", short " + std::to_string(n.short_of) + ", unclear " +
           std::to_string(n.unclear) + "; no braking followed " + std::to_string(n.no_braking) + "; slow " +
           std::to_string(n.slow) + "\n";
}

std::string sensors_lines(const Tally& tally, const StreamInfo& stream) {
    std::string text;
    for (std::size_t i = 0; i < kChannelCount; ++i) {
        const core::ChannelHealth& h = tally.health[i];
        if (h.trust != core::Trust::distrusted) continue;
        text += "  sensor distrusted: " + channel_name(static_cast<Channel>(i), stream.ride_height_names) +
                " (" + std::string(word(h.fault)) + ") since " + fixed(seconds(h.since_ns), 1) + " s\n";
    }
    return text;
}

// Counters of 0 are left out: what is not there has not happened.
std::string link_line(const LinkCounters& counters) {
    std::string text;
    for (const auto& [name, count] : counters) {
        if (count == 0) continue;
        std::string words = name;
        std::replace(words.begin(), words.end(), '_', ' ');
        text += (text.empty() ? "  link: " : ", ") + words + " " + std::to_string(count);
    }
    return text.empty() ? text : text + "\n";
}

}  // namespace

std::string closure_line(const core::Closure& c) {
    std::string line = "closing " + std::to_string(c.number) + "  lap " + std::to_string(c.lap);
    if (c.zone > 0) line += " zone " + std::to_string(c.zone);
    line += "  " + fixed(c.time_command_s, 2) + " s at " + fixed(c.speed_mps, 1) + " m/s, shut in " +
            milliseconds(c.closing_time_s) + " ms: " + reattachment(c) + "; " + at_brakes(c);
    if (c.reattachment_known && c.slow) line += ", slow";
    return line;
}

std::string alarm_words(const core::Alarm& alarm, const StreamInfo& stream) {
    const std::string closing = "closing " + std::to_string(alarm.closure) + ": ";
    switch (alarm.kind) {
        case core::AlarmKind::short_at_brakes:
            return closing + "downforce short as the brakes came on, " + with_sd(alarm.shortfall_n, 0) +
                   " N missing (probability short " + probability(alarm.probability) + ")";
        case core::AlarmKind::unknown_at_brakes:
            return closing +
                   "downforce at the brakes unknown, it could not be computed; do not take it for whole";
        case core::AlarmKind::slow_reattachment:
            return closing + "slow reattachment, or not whole (probability slow " +
                   probability(alarm.probability) + ")";
        case core::AlarmKind::data_stale:
            return "data stale, everything is unknown until they return: " +
                   channel_name(alarm.channel, stream.ride_height_names);
        case core::AlarmKind::sensor_distrusted:
            return "sensor distrusted, left out of the estimate: " +
                   channel_name(alarm.channel, stream.ride_height_names);
    }
    return "unknown alarm";
}

std::string alarm_line(const core::Alarm& alarm, const StreamInfo& stream) {
    return "ALARM  " + fixed(seconds(alarm.time_ns), 2) + " s  " + alarm_words(alarm, stream);
}

std::string summary_lines(const Folder& folder, const RunEnd& end) {
    const Tally& tally = folder.tally();
    const StreamInfo& stream = folder.outing().stream;
    std::string text = "\nOuting of " + folder.outing().car_name + ": " + fixed(end.duration_s, 1) + " s, " +
                       std::to_string(end.frames) + " frames\n";
    if (!end.complete) text += "  INCOMPLETE: " + end.reason + "\n";
    text += closings_line(tally);
    text += area_line("areas, flap closed", tally.areas.closed());
    text += area_line("areas, flap open", tally.areas.open());
    if (tally.refers_to_ground())
        text += "  areas refer to speed over ground (no pitot): the wind is in them\n";
    if (tally.in_standard_air()) text += "  air density is the standard atmosphere's (no weather channels)\n";
    text += sensors_lines(tally, stream);
    text += link_line(folder.link_counters());
    return text + "  files: " + folder.path().string() + "\n";
}

Terminal::Terminal(std::ostream& out, std::ostream* status, Style style, const Folder& folder)
    : out_(out), status_(status), style_(style), folder_(folder) {}

void Terminal::on_estimate(const core::Estimate& estimate) {
    if (status_ == nullptr) return;
    const auto now = std::chrono::steady_clock::now();
    if (now < next_status_) return;
    next_status_ = now + kStatusPeriod;
    show_status(estimate);
}

void Terminal::on_closure(const core::Closure& closure) {
    say(closure_line(closure));
}

void Terminal::on_alarm(const core::Alarm& alarm) {
    const std::string line = alarm_line(alarm, folder_.outing().stream);
    say(style_ == Style::colour ? "\033[1;31m" + line + "\033[0m" : line);
}

void Terminal::on_end(const RunEnd& end) {
    clear_status();
    out_ << summary_lines(folder_, end) << std::flush;
}

void Terminal::say(const std::string& line) {
    clear_status();
    out_ << line << std::endl;
}

void Terminal::clear_status() {
    if (!status_shown_) return;
    *status_ << "\r\033[K" << std::flush;
    status_shown_ = false;
}

// Without line wrap while it is written: a terminal narrower than the line cuts it, so that one line is
// cleared by the next.
void Terminal::show_status(const core::Estimate& e) {
    const bool known = (e.flags & (core::kNotConverged | core::kStale)) == 0;
    *status_ << "\r\033[K\033[?7l";
    if (progress_ >= 0.0) *status_ << fixed(progress_ * 100.0, 0) << " %  ";
    *status_ << fixed(seconds(e.time_ns), 1) << " s  " << fixed(e.speed_mps, 1) << " m/s  downforce ";
    if (known) {
        *status_ << "front " << with_sd(e.downforce_front_n, 0) << " N, rear "
                 << with_sd(e.downforce_rear_n, 0) << " N";
    } else {
        *status_ << "unknown";
    }
    *status_ << "  " << flag_words(e.flags) << "\033[?7h" << std::flush;
    status_shown_ = true;
}

}  // namespace holdfast::outputs
