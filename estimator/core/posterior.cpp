// SPDX-License-Identifier: MIT
#include "estimator/core/posterior.hpp"

#include <algorithm>
#include <cmath>

#include "estimator/core/small_math.hpp"

namespace holdfast::core {
namespace {

constexpr double kStaysPrior = 0.03;  // probability that a part of the flow stays detached
constexpr double kStaysMean = 0.40;   // how large that part then is, over the flap's size
constexpr double kStaysSd = 0.30;
constexpr double kStaysLeast = 0.10;  // less than this share is not told apart from the flap's size
constexpr double kImpossible = -1e300;
constexpr double kSqrtHalf = 0.70710678118654752;
constexpr double kInverseSqrt2Pi = 0.39894228040143268;

struct Evidence {
    double log = kImpossible;
    double flap = 0.0, flap_variance = 0.0;  // deviation of the flap's size from its prior mean
    double stay = 0.0, stay_variance = 0.0;
};

// The whole flow comes back: one unknown, the flap's size. MODEL.md [bank-evidence].
Evidence evidence_whole(const CandidateSums& s, double flap_variance) {
    const double precision = 1.0 / flap_variance + s.flap2;
    Evidence e;
    e.flap = s.flap_residual / precision;
    e.flap_variance = 1.0 / precision;
    e.log = -0.5 * s.residual2 + 0.5 * s.flap_residual * e.flap - 0.5 * std::log(precision * flap_variance);
    return e;
}

struct Truncated {
    double probability = 0.0;  // of the untruncated normal between the bounds
    double mean = 0.0;
    double variance = 0.0;
};

Truncated truncate(double mean, double sd, double least, double most) {
    const double a = (least - mean) / sd;
    const double b = (most - mean) / sd;
    constexpr double kTiny = 1e-30;
    const double p = 0.5 * (std::erfc(a * kSqrtHalf) - std::erfc(b * kSqrtHalf));
    Truncated t;
    t.probability = std::max(p, kTiny);
    t.mean = std::clamp(mean, least, most);
    if (p <= kTiny) return t;
    const double at_least = kInverseSqrt2Pi * std::exp(-0.5 * a * a) / p;
    const double at_most = kInverseSqrt2Pi * std::exp(-0.5 * b * b) / p;
    t.mean = std::clamp(mean + sd * (at_least - at_most), least, most);
    t.variance = square(sd) * std::max(1.0 + a * at_least - b * at_most - square(at_least - at_most), 0.0);
    return t;
}

// What is believed of a part that stays detached, before the closing: a normal cut to [least, most].
struct StayPrior {
    explicit StayPrior(double flap_m2)
        : mean(kStaysMean * flap_m2),
          variance(square(kStaysSd * flap_m2)),
          least(kStaysLeast * flap_m2),
          most(flap_m2),
          log_probability(std::log(truncate(mean, std::sqrt(variance), least, most).probability)) {}
    double mean, variance, least, most, log_probability;
};

// A part stays: two unknowns.
Evidence evidence_part(const CandidateSums& s, double flap_variance, const StayPrior& stay) {
    const double residual2 = s.residual2 - 2.0 * stay.mean * s.stay_residual + square(stay.mean) * s.stay2;
    const double b1 = s.flap_residual - stay.mean * s.cross;
    const double b2 = s.stay_residual - stay.mean * s.stay2;
    const double p11 = 1.0 / flap_variance + s.flap2;
    const double p22 = 1.0 / stay.variance + s.stay2;
    const double determinant = p11 * p22 - square(s.cross);
    Evidence e;
    e.flap = (p22 * b1 - s.cross * b2) / determinant;
    e.stay = stay.mean + (p11 * b2 - s.cross * b1) / determinant;
    e.flap_variance = p22 / determinant;
    e.log = -0.5 * residual2 + 0.5 * (b1 * e.flap + b2 * (e.stay - stay.mean)) -
            0.5 * std::log(determinant * flap_variance * stay.variance);
    // The part that stays lies between a noticeable share and the whole: evidence and mean of the truncated
    // normal.
    const Truncated after = truncate(e.stay, std::sqrt(p11 / determinant), stay.least, stay.most);
    e.log += std::log(after.probability) - stay.log_probability;
    e.stay = after.mean;
    e.stay_variance = after.variance;
    return e;
}

CandidateSums tempered(CandidateSums s, double temper) {
    const double f = 1.0 / temper;
    return {s.residual2 * f, s.flap_residual * f, s.flap2 * f, s.stay_residual * f, s.stay2 * f, s.cross * f};
}

// Weight against the best candidate's; far below it none, not one that only costs time.
double relative_weight(double log_ratio) {
    constexpr double kNone = -40.0;  // 4e-18
    return log_ratio > kNone ? std::exp(log_ratio) : 0.0;
}

double mix(double a, double b, double share) {
    return a + (b - a) * share;
}

}  // namespace

void weigh_candidates(const ReattachmentBank& bank, const Usual& usual, double temper,
                      CandidateWeights& out) {
    const double flap0 = bank.flap_prior_mean();
    const double flap_variance = std::max(bank.flap_prior_variance(), 1e-8);
    const StayPrior stay(flap0);
    const double log_none_stays = std::log(1.0 - kStaysPrior);
    const double log_some_stays = std::log(kStaysPrior);
    std::array<double, kTauCount> log_tau_weight;
    for (std::size_t t = 0; t < kTauCount; ++t) log_tau_weight[t] = std::log(usual.tau_weight(tau_chords(t)));
    double best = kImpossible;
    for (std::size_t shape = 0; shape < kShapeCount; ++shape) {
        for (std::size_t start = 0; start < kStartCount; ++start) {
            const double log_slice = std::log(usual.shape_weight(shape) * usual.start_weight(start));
            for (std::size_t t = 0; t < kTauCount; ++t) {
                const std::size_t c = candidate_index(shape, start, t);
                const CandidateSums s = tempered(bank.sums(c), temper);
                const Evidence whole = evidence_whole(s, flap_variance);
                const Evidence part = evidence_part(s, flap_variance, stay);
                const double odds = std::exp(log_some_stays + part.log - log_none_stays - whole.log);
                const double part_share = std::isinf(odds) ? 1.0 : odds / (1.0 + odds);
                out.log_weight[c] = log_slice + log_tau_weight[t] +
                                    (odds > 1.0 ? log_some_stays + part.log + std::log1p(1.0 / odds)
                                                : log_none_stays + whole.log + std::log1p(odds));
                out.stays[c] = part_share;
                out.flap_mean[c] = flap0 + mix(whole.flap, part.flap, part_share);
                out.flap_variance[c] = mix(whole.flap_variance, part.flap_variance, part_share) +
                                       part_share * (1.0 - part_share) * square(whole.flap - part.flap);
                out.stay_mean[c] = part_share * part.stay;
                out.some_stay_mean[c] = part.stay;
                out.some_stay_variance[c] = part.stay_variance;
                best = std::max(best, out.log_weight[c]);
            }
        }
    }
    double sum = 0.0;
    for (std::size_t c = 0; c < kCandidateCount; ++c)
        sum += out.weight[c] = relative_weight(out.log_weight[c] - best);
    for (std::size_t c = 0; c < kCandidateCount; ++c) out.weight[c] /= sum;
}

double PosteriorPoint::share_missing(double time_s) const {
    if (std::isnan(start_s) || time_s <= start_s) return 1.0;
    return 1.0 - share_back_at(shape, (time_s - start_s) / tau_s);
}

void refine(const ReattachmentBank& bank, const CandidateWeights& weights, Posterior& out) {
    out.count = 0;
    double best = kImpossible;
    for (const double w : weights.log_weight) best = std::max(best, w);
    double sum = 0.0;
    std::array<double, kFineTauCount> tau_s;
    for (std::size_t k = 0; k < kFineTauCount; ++k) {
        const std::size_t t = k / kFine;
        const double share = static_cast<double>(k % kFine) / static_cast<double>(kFine);
        tau_s[k] =
            bank.tau_s(t) * std::pow(bank.tau_s(std::min(t + 1, kTauCount - 1)) / bank.tau_s(t), share);
    }
    for (std::size_t shape = 0; shape < kShapeCount; ++shape) {
        for (std::size_t start = 0; start < kStartCount; ++start) {
            const std::size_t first = candidate_index(shape, start, 0);
            const auto log_at = [&](std::size_t t) {
                return weights.log_weight[first + std::min(t, kTauCount - 1)];
            };
            for (std::size_t k = 0; k < kFineTauCount; ++k) {
                const std::size_t t = k / kFine;
                const std::size_t next = std::min(t + 1, kTauCount - 1);
                const double share = static_cast<double>(k % kFine) / static_cast<double>(kFine);
                // Cubic through the four neighbours (Catmull-Rom); log-likelihoods are smooth in ln tau.
                const double p1 = log_at(t), p2 = log_at(next);
                const double p0 = t > 0 ? log_at(t - 1) : 2.0 * p1 - p2;
                const double p3 = t + 2 < kTauCount ? log_at(t + 2) : 2.0 * p2 - p1;
                const double log_weight =
                    p1 +
                    0.5 * share *
                        (p2 - p0 +
                         share * (2.0 * p0 - 5.0 * p1 + 4.0 * p2 - p3 + share * (3.0 * (p1 - p2) + p3 - p0)));
                PosteriorPoint& point = out.points[out.count++];
                point.weight = relative_weight(std::min(log_weight - best, 50.0));
                sum += point.weight;
                point.tau_s = tau_s[k];
                point.start_s = bank.start_time_s(start);
                point.shape = static_cast<Shape>(shape);
                point.flap_m2 = mix(weights.flap_mean[first + t], weights.flap_mean[first + next], share);
                point.flap_variance =
                    mix(weights.flap_variance[first + t], weights.flap_variance[first + next], share);
                point.stay_m2 =
                    mix(weights.some_stay_mean[first + t], weights.some_stay_mean[first + next], share);
                point.stay_variance = mix(weights.some_stay_variance[first + t],
                                          weights.some_stay_variance[first + next], share);
                point.stays = mix(weights.stays[first + t], weights.stays[first + next], share);
            }
        }
    }
    for (std::size_t i = 0; i < out.count; ++i) out.points[i].weight /= sum;
}

void WeightedValues::sort() {
    for (std::size_t i = 0; i < count; ++i) order[i] = i;
    std::sort(order.begin(), order.begin() + static_cast<std::ptrdiff_t>(count),
              [this](std::size_t a, std::size_t b) {
                  return value[a] < value[b] || (value[a] == value[b] && a < b);
              });
}

double WeightedValues::quantile(double share) const {
    double total = 0.0;
    for (std::size_t i = 0; i < count; ++i) total += weight[i];
    double below = 0.0;
    for (std::size_t i = 0; i < count; ++i) {
        const double w = weight[order[i]] / total;
        if (below + w >= share) return value[order[i]];
        below += w;
    }
    return count > 0 ? value[order[count - 1]] : 0.0;
}

}  // namespace holdfast::core
