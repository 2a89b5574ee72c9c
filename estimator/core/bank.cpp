// SPDX-License-Identifier: MIT
#include "estimator/core/bank.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

namespace holdfast::core {
namespace {

constexpr double kBaseTau_chords = 13.0;  // the base path: a usual closing; only a reference, any would do
constexpr std::size_t kBaseStart = 4;
constexpr double kNever = std::numeric_limits<double>::quiet_NaN();

}  // namespace

double tau_chords(std::size_t tau_index) {
    const double share = static_cast<double>(tau_index) / static_cast<double>(kTauCount - 1);
    return kTauLeast_chords * std::pow(kTauMost_chords / kTauLeast_chords, share);
}

void ReattachmentBank::begin(ChassisFilter::Filter& filter, double chord_time_s, const Regain& regain) {
    running_ = true;
    chord_time_s_ = chord_time_s;
    // What comes back is the flap as the opening showed it, and a difference that the closed state may have.
    // The difference moves the area and the flap's size together, so that the level with the flap open stays.
    StateVector both{};
    both[kAreaRear] = 1.0;
    both[kFlapAreaRear] = 1.0;
    open_flap_mean_ = filter.x[kFlapAreaRear];
    open_flap_variance_ = filter.diagonal(kFlapAreaRear);
    difference_variance_ = (regain.ratio_sd * open_flap_mean_) * (regain.ratio_sd * open_flap_mean_);
    const double difference = (regain.ratio - 1.0) * open_flap_mean_;
    for (std::size_t i = 0; i < kChassisCount; ++i) filter.x[i] += difference * both[i];
    filter.add_rank_one(both, difference_variance_);
    flap_prior_mean_ = filter.x[kFlapAreaRear];
    flap_prior_variance_ = filter.diagonal(kFlapAreaRear);
    filter.diagonal(kFlapAreaRear) = 0.0;
    base_missing_ = 1.0;
    base_decay_ = 1.0;
    start_time_s_.fill(kNever);
    decay_dt_s_ = -1.0;
    missing_.setOnes();
    decay_.setOnes();
    tail_decay_.setOnes();
    for (auto& row : deviation_) row.setZero();
    whole_deviation_.fill(0.0);
    residual2_.setZero();
    flap_residual_.setZero();
    flap2_.setZero();
    stay_residual_.setZero();
    stay2_.setZero();
    cross_.setZero();
}

double ReattachmentBank::advance(double time_s, double dt_s, double flap_position) {
    flap_at(flap_position, time_s);
    share_of_all(time_s, dt_s);
    const double base_start = start_time_s_[kBaseStart];
    if (time_s > base_start) {
        base_decay_ *= std::exp(-std::min(dt_s, time_s - base_start) / (kBaseTau_chords * chord_time_s_));
    }
    base_missing_ = base_decay_;
    return base_missing_;
}

void ReattachmentBank::flap_shut(double time_s) {
    flap_at(0.0, time_s);
}

void ReattachmentBank::flap_at(double position, double time_s) {
    for (std::size_t s = 0; s < kStartCount; ++s) {
        if (std::isnan(start_time_s_[s]) && position <= kStartRules[s].position)
            start_time_s_[s] = time_s + kStartRules[s].chords * chord_time_s_;
    }
}

void ReattachmentBank::share_of_all(double time_s, double dt_s) {
    if (dt_s != decay_dt_s_) {
        decay_dt_s_ = dt_s;
        for (std::size_t t = 0; t < kTauCount; ++t) {
            const double decay = std::exp(-dt_s / tau_s(t));
            const double tail = std::exp(-dt_s / (kTailRatio * tau_s(t)));
            for (std::size_t group = 0; group < kShapeCount * kStartCount; ++group) {
                const auto c = static_cast<Eigen::Index>(group * kTauCount + t);
                decay_step_[c] = decay;
                tail_step_[c] = tail;
            }
        }
    }
    constexpr auto kTaus = static_cast<Eigen::Index>(kTauCount);
    for (std::size_t shape = 0; shape < kShapeCount; ++shape) {
        for (std::size_t start = 0; start < kStartCount; ++start) {
            if (!(time_s > start_time_s_[start])) continue;
            const auto first = static_cast<Eigen::Index>(candidate_index(shape, start, 0));
            const double since = time_s - start_time_s_[start];
            if (since < dt_s) {  // the start lies within this step
                for (Eigen::Index t = 0; t < kTaus; ++t) {
                    const double tau = tau_s(static_cast<std::size_t>(t));
                    decay_[first + t] = std::exp(-since / tau);
                    tail_decay_[first + t] = std::exp(-since / (kTailRatio * tau));
                }
            } else {
                decay_.segment(first, kTaus) *= decay_step_.segment(first, kTaus);
                tail_decay_.segment(first, kTaus) *= tail_step_.segment(first, kTaus);
            }
            for (Eigen::Index c = first; c < first + kTaus; ++c) {
                missing_[c] = 1.0 - share_back(static_cast<Shape>(shape), decay_[c], tail_decay_[c]);
            }
        }
    }
}

void ReattachmentBank::propagate(const ChassisStep& step) {
    const double dt = step.dt_s;
    const double half = 0.5 * dt * dt;
    // Slow states' part of the accelerations, the flap's own column left out: its path is the candidate's. A
    // few candidates at a time: their sums stay in the nearest cache.
    for (Eigen::Index first = 0; first < kCount; first += kBlock) {
        const auto of = [&](ChassisState state) { return deviation_[state].segment<kBlock>(first); };
        const Block off = missing_.segment<kBlock>(first) - base_missing_;
        Block heave = off * step.heave_accel_per_missing_area;
        Block pitch = off * step.pitch_accel_per_missing_area;
        for (std::size_t p = kMovingCount; p < kFlapAreaRear; ++p) {
            const auto slow = deviation_[p].segment<kBlock>(first);
            heave += step.heave_accel_by_state[p] * slow;
            pitch += step.pitch_accel_by_state[p] * slow;
        }
        of(kHeave) += dt * of(kHeaveRate) + half * heave;
        of(kHeaveRate) += dt * heave;
        of(kPitch) += dt * of(kPitchRate) + half * pitch;
        of(kPitchRate) += dt * pitch;
    }
    const double whole = 1.0 - base_missing_;
    double whole_heave = whole * step.heave_accel_per_missing_area;
    double whole_pitch = whole * step.pitch_accel_per_missing_area;
    for (std::size_t p = kMovingCount; p < kFlapAreaRear; ++p) {
        whole_heave += step.heave_accel_by_state[p] * whole_deviation_[p];
        whole_pitch += step.pitch_accel_by_state[p] * whole_deviation_[p];
    }
    whole_deviation_[kHeave] += dt * whole_deviation_[kHeaveRate] + half * whole_heave;
    whole_deviation_[kHeaveRate] += dt * whole_heave;
    whole_deviation_[kPitch] += dt * whole_deviation_[kPitchRate] + half * whole_pitch;
    whole_deviation_[kPitchRate] += dt * whole_pitch;
}

void ReattachmentBank::scale(ChassisState state, double factor) {
    deviation_[state] *= factor;
    whole_deviation_[state] *= factor;
}

void ReattachmentBank::weigh(const StateVector& h, const StateVector& gain,
                             const Innovation<double>& innovation, double flap_reaction, double direct) {
    double whole_reaction = direct * (1.0 - base_missing_);
    for (std::size_t i = 0; i < kFlapAreaRear; ++i) whole_reaction += h[i] * whole_deviation_[i];
    for (std::size_t i = 0; i < kFlapAreaRear; ++i) whole_deviation_[i] -= gain[i] * whole_reaction;
    // residual r = innovation - D0 reaction; regressors: flap size (reaction + column's), stay (whole -
    // reaction).
    const double weight = 1.0 / innovation.variance;
    for (Eigen::Index first = 0; first < kCount; first += kBlock) {
        Block reaction = direct * (missing_.segment<kBlock>(first) - base_missing_);
        for (std::size_t i = 0; i < kFlapAreaRear; ++i) {
            if (h[i] != 0.0) reaction += h[i] * deviation_[i].segment<kBlock>(first);
        }
        for (std::size_t i = 0; i < kFlapAreaRear; ++i)
            deviation_[i].segment<kBlock>(first) -= gain[i] * reaction;
        const Block residual = innovation.value - flap_prior_mean_ * reaction;
        const Block flap = reaction + flap_reaction;
        const Block stay = whole_reaction - reaction;
        residual2_.segment<kBlock>(first) += weight * residual.square();
        flap_residual_.segment<kBlock>(first) += weight * residual * flap;
        flap2_.segment<kBlock>(first) += weight * flap.square();
        stay_residual_.segment<kBlock>(first) += weight * residual * stay;
        stay2_.segment<kBlock>(first) += weight * stay.square();
        cross_.segment<kBlock>(first) += weight * flap * stay;
    }
}

CandidateSums ReattachmentBank::sums(std::size_t candidate) const {
    const auto c = static_cast<Eigen::Index>(candidate);
    return {residual2_[c], flap_residual_[c], flap2_[c], stay_residual_[c], stay2_[c], cross_[c]};
}

double ReattachmentBank::deviation(std::size_t candidate, std::size_t state, double flap_slope, double flap,
                                   double stay) const {
    const double own = deviation_[state][static_cast<Eigen::Index>(candidate)];
    return flap_prior_mean_ * own + (flap - flap_prior_mean_) * (flap_slope + own) +
           stay * (whole_deviation_[state] - own);
}

void ReattachmentBank::collapse(ChassisFilter::Filter& filter, const CandidateArray& weights,
                                const CandidateArray& flap_mean, const CandidateArray& flap_variance,
                                const CandidateArray& stay_mean) {
    constexpr double kNegligible = 1e-4;
    const StateVector slope = filter.column(kFlapAreaRear);  // of the base path's states with the flap's size
    const auto for_each_kept = [&](auto&& visit) {
        for (std::size_t c = 0; c < kCandidateCount; ++c) {
            if (weights[c] >= kNegligible) visit(c);
        }
    };
    double kept = 0.0;
    for_each_kept([&](std::size_t c) { kept += weights[c]; });
    StateVector mean{};  // of the deviations; of the flap's size itself in its own place
    StateVector mean_slope{};
    double within = 0.0;  // variance of the flap's size within a candidate
    for_each_kept([&](std::size_t c) {
        const double w = weights[c] / kept;
        for (std::size_t i = 0; i < kFlapAreaRear; ++i) {
            mean[i] += w * deviation(c, i, slope[i], flap_mean[c], stay_mean[c]);
            mean_slope[i] += w * (slope[i] + deviation_[i][static_cast<Eigen::Index>(c)]);
        }
        mean[kFlapAreaRear] += w * flap_mean[c];
        within += w * flap_variance[c];
    });
    auto& column = filter.column(kFlapAreaRear);
    for (std::size_t i = 0; i < kFlapAreaRear; ++i) column[i] = mean_slope[i];
    filter.diagonal(kFlapAreaRear) = within;
    for_each_kept([&](std::size_t c) {  // spread between the candidates
        StateVector off{};
        for (std::size_t i = 0; i < kFlapAreaRear; ++i) {
            off[i] = deviation(c, i, slope[i], flap_mean[c], stay_mean[c]) - mean[i];
        }
        off[kFlapAreaRear] = flap_mean[c] - mean[kFlapAreaRear];
        filter.add_rank_one(off, weights[c] / kept);
    });
    for (std::size_t i = 0; i < kFlapAreaRear; ++i) filter.x[i] += mean[i];
    filter.x[kFlapAreaRear] = mean[kFlapAreaRear];
    forget_difference(filter);
    running_ = false;
}

void ReattachmentBank::abandon(ChassisFilter::Filter& filter) {
    filter.diagonal(kFlapAreaRear) = flap_prior_variance_;
    forget_difference(filter);
    running_ = false;
}

// Back from the flap that came back to the flap that the next opening takes away: what was learned is shared
// between the opening's size and the difference by their variances. The area may be off by the difference
// elsewhere.
void ReattachmentBank::forget_difference(ChassisFilter::Filter& filter) {
    const double sum = open_flap_variance_ + difference_variance_;
    const double share = open_flap_variance_ / sum;
    const double came_back = filter.x[kFlapAreaRear];
    filter.x[kFlapAreaRear] = open_flap_mean_ + share * (came_back - flap_prior_mean_);
    const double difference = came_back - filter.x[kFlapAreaRear];
    filter.scale_state(kFlapAreaRear, std::max(share, 1e-3));
    filter.add_noise(kFlapAreaRear, share * difference_variance_);
    filter.add_noise(kAreaRear, difference * difference);
}

}  // namespace holdfast::core
