// SPDX-License-Identifier: MIT
#include "tests/bench/accuracy/figures.hpp"

#include <algorithm>
#include <cmath>
#include <cstdio>

namespace holdfast::bench {
namespace {

constexpr double kShortShare = 0.03;

struct Share {
    double yes = 0.0, of = 0.0;
    void add(bool v) {
        of += 1.0;
        yes += v ? 1.0 : 0.0;
    }
    [[nodiscard]] double value() const { return of > 0.0 ? yes / of : std::nan(""); }
};

struct Square {
    double sum = 0.0, sum2 = 0.0, n = 0.0;
    void add(double v) {
        if (!std::isfinite(v)) return;
        sum += v;
        sum2 += v * v;
        n += 1.0;
    }
    [[nodiscard]] double mean() const { return n > 0.0 ? sum / n : std::nan(""); }
    [[nodiscard]] double rms() const { return n > 0.0 ? std::sqrt(sum2 / n) : std::nan(""); }
};

// Which faults were named, after how long, and which sound channels were.
void count_naming(const OutingResult& r, Figures& f) {
    const auto faulty = [&](Channel c) {
        return std::any_of(r.faults.begin(), r.faults.end(),
                           [&](const sim::Fault& x) { return x.channel == c; });
    };
    for (const sim::Fault& fault : r.faults) {
        ++f.faults;
        for (const core::Alarm& a : r.alarms) {
            const double after_s = static_cast<double>(a.time_ns) * 1e-9 - fault.from_s;
            if (a.kind != core::AlarmKind::sensor_distrusted || a.channel != fault.channel || after_s < 0.0)
                continue;
            f.named_after_s =
                (f.named_after_s * static_cast<double>(f.named) + after_s) / static_cast<double>(f.named + 1);
            ++f.named;
            break;
        }
    }
    for (const core::Alarm& a : r.alarms) {
        if (a.kind == core::AlarmKind::sensor_distrusted && !faulty(a.channel)) ++f.distrusted;
    }
}

}  // namespace

Figures figures_of(std::span<const OutingResult> results) {
    Figures f;
    Square tau, tau_z, over_brakes, over_second, t95, shortfall, shortfall_z, front, rear, drag;
    Share inside, slow, others, part, wrong, unclear, front_in, rear_in, drag_in;
    double wall_s = 0.0, duration_s = 0.0;
    for (const OutingResult& r : results) {
        ++f.outings;
        f.invented += r.invented;
        count_naming(r, f);
        wall_s += r.wall_s;
        duration_s += r.duration_s;
        for (const ClosurePair& p : r.closings) {
            ++f.closings;
            if (!p.found) continue;
            ++f.found;
            const core::Closure& c = *p.found;
            if (!c.reattachment_known) continue;
            ++f.judged;
            const bool whole = p.truth.plateau > 0.999;
            if (whole && std::isfinite(p.truth.t95_s)) {
                t95.add(c.t95_s - p.truth.t95_s);
                inside.add(c.whole && c.t95_low_s <= p.truth.t95_s && p.truth.t95_s <= c.t95_high_s);
                if (p.truth.slow) {
                    slow.add(c.slow);
                } else {
                    others.add(c.slow);
                }
                if (p.shape == sim::Reattachment::first_order) {
                    tau.add(c.tau_s.value - p.truth.tau_s);
                    tau_z.add((c.tau_s.value - p.truth.tau_s) / c.tau_s.sd);
                    if (p.bound) {
                        const double error = c.tau_s.value - p.truth.tau_s;
                        over_second.add(error / p.bound->until_one_second_s);
                        if (std::isfinite(p.bound->until_brakes_s))
                            over_brakes.add(error / p.bound->until_brakes_s);
                    }
                }
            } else if (!whole) {
                part.add(c.slow);
            }
            if (!std::isfinite(p.truth.time_brake_s) || !c.braked) continue;
            const bool is_short = p.truth.missing_share > kShortShare;
            unclear.add(c.verdict == core::Verdict::unclear);
            wrong.add((c.verdict == core::Verdict::short_of && !is_short) ||
                      (c.verdict == core::Verdict::full && is_short));
            shortfall.add(c.shortfall_n.value - p.truth.missing_at_brake_n);
            shortfall_z.add((c.shortfall_n.value - p.truth.missing_at_brake_n) /
                            std::max(c.shortfall_n.sd, 10.0));
        }
        const auto area = [](const AreaErrors& a, Square& mean, Share& in) {
            mean.add(a.mean_error_share());
            in.yes += a.inside;
            in.of += a.count;
        };
        area(r.cla_front, front, front_in);
        area(r.cla_rear, rear, rear_in);
        area(r.cda, drag, drag_in);
    }
    f.tau_rms_ms = 1e3 * tau.rms();
    f.tau_over_brakes_bound_rms = over_brakes.rms();
    f.tau_over_second_bound_rms = over_second.rms();
    f.tau_z_rms = tau_z.rms();
    f.t95_bias_ms = 1e3 * t95.mean();
    f.t95_rms_ms = 1e3 * t95.rms();
    f.t95_inside = inside.value();
    f.slow_flagged = slow.value();
    f.others_flagged = others.value();
    f.part_flagged = part.value();
    f.verdict_wrong = wrong.value();
    f.verdict_unclear = unclear.value();
    f.shortfall_rms_n = shortfall.rms();
    f.shortfall_z_rms = shortfall_z.rms();
    f.front_rms = front.rms();
    f.rear_rms = rear.rms();
    f.drag_rms = drag.rms();
    f.front_inside = front_in.value();
    f.rear_inside = rear_in.value();
    f.drag_inside = drag_in.value();
    f.times_real = duration_s / wall_s;
    return f;
}

std::string closing_rows(const OutingResult& result) {
    std::string out;
    for (const ClosurePair& p : result.closings) {
        char line[400];
        if (!p.found) {
            std::snprintf(line, sizeof line, "  %2d not found\n", p.truth.number);
        } else {
            const core::Closure& c = *p.found;
            std::snprintf(line, sizeof line,
                          "  %2d shape %d V %.0f shut %+.1f ms brake %+.1f ms gap %.0f ms| tau %.1f est "
                          "%.1f+-%.1f | t95 %.0f est %.0f "
                          "[%.0f %.0f] ms plateau %.2f est %.2f | short %.0f est %.0f+-%.0f N p %.3f | slow "
                          "%d est %d p %.3f\n",
                          p.truth.number, static_cast<int>(p.shape), p.truth.speed_mps,
                          1e3 * (c.time_closed_s - p.truth.time_closed_s),
                          1e3 * (c.time_brake_s - p.truth.time_brake_s),
                          1e3 * (p.truth.time_brake_s - p.truth.time_closed_s), 1e3 * p.truth.tau_s,
                          1e3 * c.tau_s.value, 1e3 * c.tau_s.sd, 1e3 * p.truth.t95_s, 1e3 * c.t95_s,
                          1e3 * c.t95_low_s, 1e3 * c.t95_high_s, p.truth.plateau, c.plateau,
                          p.truth.missing_at_brake_n, c.shortfall_n.value, c.shortfall_n.sd,
                          c.probability_short, static_cast<int>(p.truth.slow), static_cast<int>(c.slow),
                          c.probability_slow);
        }
        out += line;
        if (p.bound) {
            std::snprintf(line, sizeof line,
                          "     bound of tau %.1f ms until the brakes, %.1f ms until 1 s\n",
                          1e3 * p.bound->until_brakes_s, 1e3 * p.bound->until_one_second_s);
            out += line;
        }
    }
    for (const core::Alarm& a : result.alarms) {
        if (a.kind != core::AlarmKind::sensor_distrusted && a.kind != core::AlarmKind::data_stale) continue;
        out += "  " + std::to_string(static_cast<double>(a.time_ns) * 1e-9) +
               " s: " + (a.kind == core::AlarmKind::data_stale ? "stale" : "distrusted") + " channel " +
               std::to_string(index(a.channel)) + "\n";
    }
    return out;
}

std::string table_head() {
    return "scenario                                         closings found inv | tau rms  /brk   /1s    z | "
           "t95 "
           "bias   rms  in% "
           "| slow%  "
           "oth% part% | "
           "wrong%  uncl% | short rms    z | front  rear  drag % | in%: f    r    d | distr named after s | "
           "x real";
}

std::string table_row(const std::string& name, const Figures& f) {
    char line[400];
    std::snprintf(line, sizeof line,
                  "%-48s %8zu %5zu %3zu | %7.1f %5.2f %5.2f %4.2f | %8.1f %5.1f %4.0f | %5.0f %5.1f %5.0f | "
                  "%6.1f %6.1f "
                  "| %9.0f %4.2f | "
                  "%5.2f %5.2f %5.2f  | %6.0f %4.0f %4.0f | %5zu %2zu/%-2zu %6.1f | %6.0f",
                  name.c_str(), f.closings, f.found, f.invented, f.tau_rms_ms, f.tau_over_brakes_bound_rms,
                  f.tau_over_second_bound_rms, f.tau_z_rms, f.t95_bias_ms, f.t95_rms_ms, 100 * f.t95_inside,
                  100 * f.slow_flagged, 100 * f.others_flagged, 100 * f.part_flagged, 100 * f.verdict_wrong,
                  100 * f.verdict_unclear, f.shortfall_rms_n, f.shortfall_z_rms, 100 * f.front_rms,
                  100 * f.rear_rms, 100 * f.drag_rms, 100 * f.front_inside, 100 * f.rear_inside,
                  100 * f.drag_inside, f.distrusted, f.named, f.faults, f.named_after_s, f.times_real);
    return line;
}

}  // namespace holdfast::bench
