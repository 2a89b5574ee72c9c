// SPDX-License-Identifier: MIT
#include "estimator/core/closure_tracker.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "estimator/core/small_math.hpp"

namespace holdfast::core {
namespace {

constexpr double kWindow_s =
    1.0;  // after the flap is shut: the slowest usual reattachment and its tail fit in
constexpr double kGiveUp_s = 2.0;        // a flap that takes longer to shut is not judged
constexpr double kBrakesWithin_s = 3.0;  // of the flap being shut
constexpr double kWeighEvery_s = 0.020;
// Of the rear area with the flow back: at speeds and heights, and soon under brakes, where the car has not
// been since the flap opened. Found on simulated cars whose areas are no parabolas.
constexpr double kLevelUnsure_m2 = 0.04;
constexpr double kPartProbability = 0.5;  // that a part stays, for the record to say so
constexpr std::size_t kUsualKnownAfter = 3;
constexpr double kFlapPicture_s = 0.004;  // spacing of the flap's points in the picture
constexpr double kNegligibleWeight = 1e-5;
constexpr double kUnheard = 1e-9;  // all points of less weight together move a probability by 3e-6 at most
constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();

double normal_cdf(double z) {
    return 0.5 * std::erfc(-z * 0.70710678118654752);
}

}  // namespace

void ClosureTracker::begin(const AeroNow& now, double time_command_s, double chord_m,
                           ChassisFilter::Filter& filter) {
    closure_ = Closure{};
    closure_.number = ++count_;
    closure_.lap = now.lap;
    closure_.time_command_s = time_command_s;
    closure_.time_closed_s = kNaN;
    closure_.speed_mps = now.speed_mps;
    closure_.lap_distance_brake_m = kNaN;
    waiting_ = true;
    shut_ = alarmed_ = false;
    usable_ = now.reliable;
    chord_m_ = chord_m;
    next_weigh_s_ = now.time_s;
    posterior_.count = 0;
    flap_count_ = 0;
    missing_ = {filter.x[kFlapAreaRear], 0.0, 1.0, 0.0};
    filter.add_noise(kAreaRear, square(kLevelUnsure_m2));
    bank_.begin(filter, chord_m / std::max(now.speed_mps, 5.0), usual_.regain());
}

void ClosureTracker::shut(double time_moved_s, double time_shut_s) {
    if (!waiting_) return;
    shut_ = true;
    bank_.flap_shut(time_shut_s);
    closure_.time_closed_s = time_shut_s;
    closure_.closing_time_s = time_shut_s - time_moved_s;
}

void ClosureTracker::weigh(double colour) {
    weigh_candidates(bank_, usual_, colour, weights_);
    double area = 0.0, area2 = 0.0, share = 0.0, share2 = 0.0, variance = 0.0;
    for (std::size_t c = 0; c < kCandidateCount; ++c) {
        const double w = weights_.weight[c];
        const double m = bank_.missing(c);
        const double a = weights_.flap_mean[c] * m + weights_.stay_mean[c] * (1.0 - m);
        const double s = a / std::max(weights_.flap_mean[c], 0.05);
        area += w * a;
        area2 += w * a * a;
        share += w * s;
        share2 += w * s * s;
        variance += w * weights_.flap_variance[c] * m * m;
    }
    missing_ = {area, std::sqrt(std::max(area2 - area * area, 0.0) + variance), share,
                std::sqrt(std::max(share2 - share * share, 0.0))};
}

double ClosureTracker::mean_deviation(std::size_t state, const ChassisFilter::Filter& filter) const {
    double mean = 0.0;
    const double slope = filter.column(kFlapAreaRear)[state];
    for (std::size_t c = 0; c < kCandidateCount; ++c) {
        if (weights_.weight[c] < 1e-4) continue;
        mean += weights_.weight[c] *
                bank_.deviation(c, state, slope, weights_.flap_mean[c], weights_.stay_mean[c]);
    }
    return mean;
}

void ClosureTracker::brakes(double time_brake_s, std::int32_t zone, double lap_distance_m,
                            const AeroNow& now) {
    if (!waiting_ || closure_.braked || time_brake_s < closure_.time_command_s) return;
    closure_.braked = true;
    closure_.time_brake_s = time_brake_s;
    closure_.zone = zone;
    closure_.lap_distance_brake_m = lap_distance_m;
    at_brake_ = now;
    if (!usable_) {
        alarm_out_ = Alarm{AlarmKind::unknown_at_brakes,
                           static_cast<std::int64_t>(time_brake_s * 1e9),
                           closure_.number,
                           Channel::speed,
                           0.0,
                           {}};
        alarmed_ = true;
        return;
    }
    if (bank_.running()) {
        weigh(colour_);
        refine(bank_, weights_, posterior_);
    }
    judge_shortfall();
}

// Shortfall at the brakes from the posterior as it stands, and the alarm when its probability passes the
// limit.
void ClosureTracker::judge_shortfall() {
    const AeroNow& at = at_brake_;
    const double q = at.dynamic_pressure_pa;
    const double rear_attached = std::max(q * at.rear_area_attached_m2, 1.0);
    const double limit = settings_.short_share_limit * rear_attached;
    const double limit_sd = settings_.short_share_limit * q * at.rear_area_sd_m2;
    double mean = 0.0, second = 0.0, short_probability = 0.0, rear_mean = 0.0;
    // Of one point, where the whole flow comes back or a part stays detached; the front loses its share too.
    const auto add = [&](double weight, double rear_n, double sd) {
        short_probability += weight * normal_cdf((rear_n - limit) / std::max(std::hypot(sd, limit_sd), 1.0));
        rear_mean += weight * rear_n;
        const double all = 1.0 + at.front_per_rear;
        mean += weight * all * rear_n;
        second += weight * square(all) * (square(rear_n) + square(sd));
    };
    for (std::size_t i = 0; i < posterior_.count; ++i) {
        const PosteriorPoint& p = posterior_.points[i];
        if (p.weight < kUnheard) continue;
        const double missing = p.share_missing(closure_.time_brake_s);
        const double rear_n = q * p.flap_m2 * missing;
        const double variance = p.flap_variance * square(missing);
        add(p.weight * (1.0 - p.stays), rear_n, q * std::sqrt(variance));
        add(p.weight * p.stays, rear_n + q * p.stay_m2 * (1.0 - missing),
            q * std::sqrt(variance + p.stay_variance * square(1.0 - missing)));
    }
    closure_.shortfall_n = {mean, std::sqrt(std::max(second - mean * mean, 0.0))};
    closure_.shortfall_share = rear_mean / rear_attached;
    closure_.probability_short = short_probability;
    closure_.verdict = short_probability >= settings_.verdict_probability         ? Verdict::short_of
                       : short_probability <= 1.0 - settings_.verdict_probability ? Verdict::full
                                                                                  : Verdict::unclear;
    if (!alarmed_ && short_probability >= settings_.alarm_probability) {
        alarmed_ = true;
        alarm_out_ = Alarm{AlarmKind::short_at_brakes,
                           static_cast<std::int64_t>(closure_.time_brake_s * 1e9),
                           closure_.number,
                           Channel::speed,
                           short_probability,
                           closure_.shortfall_n};
    }
}

void ClosureTracker::describe_reattachment() {
    Closure& c = closure_;
    double tau = 0.0, tau2 = 0.0, stays = 0.0, flap = 0.0, flap2 = 0.0, flap_within = 0.0, stay = 0.0,
           log_chords = 0.0, log_chords2 = 0.0, slow = 0.0;
    const LogNormal usual = usual_.t95_chords();
    const double log_limit = usual.log_mean + std::log(settings_.slow_factor);
    std::array<double, kStartCount> start_share{};
    std::array<double, kShapeCount> shape_share{};
    std::array<double, kShapeCount> u95{};
    for (std::size_t s = 0; s < kShapeCount; ++s) u95[s] = time_to_95(static_cast<Shape>(s));
    sorted_.count = posterior_.count;
    constexpr std::size_t kPerSlice = (kTauCount - 1) * kFine + 1;
    for (std::size_t i = 0; i < posterior_.count; ++i) {
        const PosteriorPoint& p = posterior_.points[i];
        const double t95 = p.start_s - c.time_closed_s + u95[static_cast<std::size_t>(p.shape)] * p.tau_s;
        const double chords = std::max(t95, 1e-3) * c.speed_mps / chord_m_;
        sorted_.value[i] = t95;
        sorted_.weight[i] = p.weight;
        tau += p.weight * p.tau_s;
        tau2 += p.weight * p.tau_s * p.tau_s;
        stays += p.weight * p.stays;
        flap += p.weight * p.flap_m2;
        flap2 += p.weight * p.flap_m2 * p.flap_m2;
        flap_within += p.weight * p.flap_variance;
        stay += p.weight * p.stays * p.stay_m2;
        log_chords += p.weight * std::log(chords);
        log_chords2 += p.weight * square(std::log(chords));
        slow += p.weight *
                (p.stays + (1.0 - p.stays) * normal_cdf((std::log(chords) - log_limit) / usual.log_sd));
        const std::size_t slice = i / kPerSlice;
        start_share[slice % kStartCount] += p.weight;
        shape_share[slice / kStartCount] += p.weight;
    }
    sorted_.sort();
    c.reattachment_known = true;
    c.tau_s = {tau, std::sqrt(std::max(tau2 - tau * tau, 0.0))};
    c.t95_s = sorted_.quantile(0.5);
    c.t95_low_s = sorted_.quantile(0.025);
    c.t95_high_s = sorted_.quantile(0.975);
    c.whole = stays < kPartProbability;
    c.plateau = c.whole ? 1.0 : 1.0 - stay / std::max(flap, 0.05);
    c.usual_known = usual_.count() >= kUsualKnownAfter;
    c.probability_slow = slow;
    c.slow = slow >= settings_.slow_probability || !c.whole;
    stays_share_ = c.whole ? 0.0 : 1.0 - c.plateau;
    const double log_sd = std::sqrt(std::max(log_chords2 - log_chords * log_chords, 1e-4));
    if (c.whole) {
        const double flap_sd = std::sqrt(std::max(flap2 - flap * flap, 0.0) + flap_within);
        usual_.learn_regain(flap / bank_.open_flap_mean(), flap_sd / bank_.open_flap_mean());
    }
    if (c.whole) usual_.learn(log_chords, log_sd, start_share, shape_share);
}

void ClosureTracker::finish_bank(const AeroNow& now, double colour, ChassisFilter::Filter& filter) {
    weigh(colour);
    refine(bank_, weights_, posterior_);
    bank_.collapse(filter, weights_.weight, weights_.flap_mean, weights_.flap_variance, weights_.stay_mean);
    move_stay_into_area(filter);
    if (!shut_ || !usable_) return;
    describe_reattachment();
    closure_.flap_downforce_n = now.dynamic_pressure_pa * filter.x[kFlapAreaRear];
    if (closure_.slow) {
        slow_alarm_out_ = Alarm{AlarmKind::slow_reattachment,
                                static_cast<std::int64_t>(closure_.time_closed_s * 1e9),
                                closure_.number,
                                Channel::speed,
                                closure_.probability_slow,
                                {}};
    }
    if (closure_.braked) judge_shortfall();
}

// What stays detached from now on is a smaller rear area; how much, the next seconds will show.
void ClosureTracker::move_stay_into_area(ChassisFilter::Filter& filter) {
    stays_area_m2_ = 0.0;
    for (std::size_t c = 0; c < kCandidateCount; ++c)
        stays_area_m2_ += weights_.weight[c] * weights_.stay_mean[c];
    filter.x[kAreaRear] -= stays_area_m2_;
    filter.add_noise(kAreaRear, square(stays_area_m2_));
}

void ClosureTracker::flap_opens(ChassisFilter::Filter& filter) {
    filter.x[kAreaRear] += stays_area_m2_;
    filter.add_noise(kAreaRear, square(stays_area_m2_));
    stays_area_m2_ = stays_share_ = 0.0;
}

void ClosureTracker::tick(const AeroNow& now, double colour, ChassisFilter::Filter& filter) {
    colour_ = colour;
    if (!waiting_) return;
    if (bank_.running()) known_until_s_ = now.time_s;
    if (!now.reliable) usable_ = false;
    if (bank_.running()) {
        if (!shut_ && now.time_s > closure_.time_command_s + kGiveUp_s) {
            end(now, colour, filter, true);
            return;
        }
        if (shut_ && now.time_s >= closure_.time_closed_s + kWindow_s) {
            finish_bank(now, colour, filter);
        } else if (now.time_s >= next_weigh_s_) {
            next_weigh_s_ = now.time_s + kWeighEvery_s;
            weigh(colour);
            if (closure_.braked && usable_ && !alarmed_) {
                refine(bank_, weights_, posterior_);
                judge_shortfall();
            }
        }
    }
    if (!bank_.running() && (closure_.braked || now.time_s > closure_.time_closed_s + kBrakesWithin_s))
        publish();
}

void ClosureTracker::end(const AeroNow& now, double colour, ChassisFilter::Filter& filter, bool data_lost) {
    if (!waiting_) return;
    if (data_lost) usable_ = false;
    if (bank_.running()) {
        if (shut_ && usable_) {
            finish_bank(now, colour, filter);
        } else {
            bank_.abandon(filter);
        }
    }
    publish();
}

void ClosureTracker::publish() {
    waiting_ = false;
    if (!shut_) {  // never shut: not a closing
        --count_;
        return;
    }
    if (closure_.braked && closure_.reattachment_known) {
        // Margin over the posterior: braking instant less the instant of 95 %.
        closure_.margin_s = {closure_.time_brake_s - closure_.time_closed_s - closure_.t95_s,
                             (closure_.t95_high_s - closure_.t95_low_s) / (2.0 * 1.959964)};
    }
    closure_out_ = closure_;
}

void ClosureTracker::flap_moved(double time_s, double position) {
    if (!waiting_ || flap_count_ == Regrowth::kFlapPoints) return;
    if (flap_count_ > 0 && time_s - flap_time_s_[flap_count_ - 1] < kFlapPicture_s) return;
    flap_time_s_[flap_count_] = time_s;
    flap_position_[flap_count_++] = position;
}

bool ClosureTracker::regrowth(Regrowth& out) {
    if (count_ == 0) return false;
    if (bank_.running()) refine(bank_, weights_, posterior_);
    if (posterior_.count == 0) return false;
    out = Regrowth{};
    out.closure = closure_.number;
    out.final = !bank_.running();
    out.shut = shut_;
    out.time_command_s = closure_.time_command_s;
    out.time_shut_s = shut_ ? closure_.time_closed_s : closure_.time_command_s;
    out.chord_time_s = chord_m_ / std::max(closure_.speed_mps, 5.0);
    out.known_until_s = known_until_s_ - out.time_shut_s;
    for (std::size_t i = 0; i < Regrowth::kPoints; ++i) {
        const double time_s = out.time_shut_s + Regrowth::time_s(i);
        sorted_.count = 0;
        for (std::size_t k = 0; k < posterior_.count; ++k) {
            const PosteriorPoint& p = posterior_.points[k];
            if (p.weight < kNegligibleWeight) continue;
            const double missing = p.share_missing(time_s);
            const double stays = p.stays * p.stay_m2 / std::max(p.flap_m2, 0.05);
            sorted_.value[sorted_.count] = 1.0 - missing - stays * (1.0 - missing);
            sorted_.weight[sorted_.count++] = p.weight;
        }
        sorted_.sort();
        out.share[i] = sorted_.quantile(0.5);
        out.low[i] = sorted_.quantile(0.025);
        out.high[i] = sorted_.quantile(0.975);
    }
    out.flap_count = flap_count_;
    for (std::size_t i = 0; i < flap_count_; ++i) {
        out.flap_time_s[i] = flap_time_s_[i] - out.time_shut_s;
        out.flap_position[i] = flap_position_[i];
    }
    return true;
}

std::optional<Closure> ClosureTracker::take_closure() {
    auto out = closure_out_;
    closure_out_.reset();
    return out;
}

std::optional<Alarm> ClosureTracker::take_alarm() {
    auto& which = alarm_out_ ? alarm_out_ : slow_alarm_out_;
    auto out = which;
    which.reset();
    return out;
}

}  // namespace holdfast::core
