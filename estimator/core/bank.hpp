// SPDX-License-Identifier: MIT
// The bank: for one closing of the flap, every candidate reattachment (shape, start, time constant) side by
// side.
//
// The chassis filter runs on along a base path of the missing share. Given a candidate, the model is linear
// with the same covariance, so a candidate's filter differs from the base by a vector that obeys the base's
// own transition and gains; its innovations give the candidate's likelihood, with the flap's size and a part
// that stays detached integrated out in closed form. MODEL.md [bank-deviation] to [bank-evidence].
#pragma once

#include <Eigen/Core>
#include <array>
#include <cstddef>

#include "estimator/core/chassis_filter.hpp"
#include "estimator/core/reattachment.hpp"

namespace holdfast::core {

inline constexpr std::size_t kTauCount = 26;
inline constexpr std::size_t kStartCount = 10;
inline constexpr std::size_t kCandidateCount = kShapeCount * kStartCount * kTauCount;
using CandidateArray = std::array<double, kCandidateCount>;

// Candidate index <-> (shape, start, tau): tau runs fastest.
[[nodiscard]] constexpr std::size_t candidate_index(std::size_t shape, std::size_t start, std::size_t tau) {
    return (shape * kStartCount + start) * kTauCount + tau;
}

// Reattachment starts when the flap passes `position` on its way down, and `chords` later.
struct StartRule {
    double position;
    double chords;
};
inline constexpr std::array<StartRule, kStartCount> kStartRules{{{0.80, 3.0},
                                                                 {0.65, 3.0},
                                                                 {0.50, 3.0},
                                                                 {0.40, 3.0},
                                                                 {0.30, 3.0},
                                                                 {0.20, 3.0},
                                                                 {0.10, 3.0},
                                                                 {0.03, 3.0},
                                                                 {0.03, 5.5},
                                                                 {0.03, 8.0}}};
inline constexpr double kTauLeast_chords = 3.0;
inline constexpr double kTauMost_chords = 110.0;
[[nodiscard]] double tau_chords(std::size_t tau_index);

// Sums of the innovations' likelihood of a candidate, [bank-evidence].
struct CandidateSums {
    double residual2 = 0.0;                   // r^2 / S
    double flap_residual = 0.0, flap2 = 0.0;  // a r / S, a^2 / S: a for 1 m^2 of flap size
    double stay_residual = 0.0, stay2 = 0.0;  // the same for 1 m^2 that stays detached
    double cross = 0.0;
};

// How much of the flap's opening comes back at a closing, as earlier closings showed: 1 where the areas are
// as modelled.
struct Regain {
    double ratio = 1.0;
    double ratio_sd = 0.1;
};

class ReattachmentBank {
  public:
    // Begin at the closing command. The filter's flap size is conditioned on from here on (its variance is
    // put aside) until collapse() gives it back.
    void begin(ChassisFilter::Filter& filter, double chord_time_s, const Regain& regain);
    [[nodiscard]] bool running() const { return running_; }

    // Before the filter's predict: advance every candidate's missing share to time_s. Returns the base path's
    // share.
    double advance(double time_s, double dt_s, double flap_position);

    // The flap is shut: positions that it was not seen to pass (a sensor whose zero has moved) it has passed
    // now.
    void flap_shut(double time_s);

    // After predict: carry the deviations through the same step.
    void propagate(const ChassisStep& step);

    // The filter multiplied a state by a factor: every candidate's deviation goes with it.
    void scale(ChassisState state, double factor);

    // After an update: what the candidates make of the same measurement. `direct` is the measurement's own
    // reaction to 1 m^2 missing, beside that through the states. Not called for a measurement that was
    // refused.
    void weigh(const ChassisFilter::Filter::Vector& h, const ChassisFilter::Filter::Vector& gain,
               const Innovation<double>& innovation, double flap_reaction, double direct);

    // Give back to the filter the mixture's mean and covariance under the weights, and stop. By candidate:
    // the flap's size (mean, variance) and the area that stays detached (mean), m^2.
    void collapse(ChassisFilter::Filter& filter, const CandidateArray& weights,
                  const CandidateArray& flap_mean, const CandidateArray& flap_variance,
                  const CandidateArray& stay_mean);
    // Stop without an answer: the base path stands, the flap's size keeps what was known before.
    void abandon(ChassisFilter::Filter& filter);

    // By how much a candidate's estimate of a state differs from the base's; flap_slope is the state's entry
    // of the filter's last column.
    [[nodiscard]] double deviation(std::size_t candidate, std::size_t state, double flap_slope, double flap,
                                   double stay) const;

    [[nodiscard]] double open_flap_mean() const { return open_flap_mean_; }
    [[nodiscard]] double flap_prior_mean() const { return flap_prior_mean_; }
    [[nodiscard]] double flap_prior_variance() const { return flap_prior_variance_; }
    [[nodiscard]] CandidateSums sums(std::size_t candidate) const;
    [[nodiscard]] double missing(std::size_t candidate) const {
        return missing_[static_cast<Eigen::Index>(candidate)];
    }
    [[nodiscard]] double base_missing() const { return base_missing_; }
    [[nodiscard]] double start_time_s(std::size_t start) const {
        return start_time_s_[start];
    }  // NaN: not yet
    [[nodiscard]] double tau_s(std::size_t tau_index) const { return tau_chords(tau_index) * chord_time_s_; }

  private:
    static constexpr Eigen::Index kCount = static_cast<Eigen::Index>(kCandidateCount);
    using Row = Eigen::Array<double, kCount, 1>;
    // Candidates are taken some at a time, so that what is passed on between their states stays in the
    // nearest cache.
    static constexpr Eigen::Index kBlock = static_cast<Eigen::Index>(kTauCount);
    using Block = Eigen::Array<double, kBlock, 1>;
    using StateVector = ChassisFilter::Filter::Vector;

    void forget_difference(ChassisFilter::Filter& filter);
    // Sets the start of every rule whose position the flap has now passed for the first time.
    void flap_at(double position, double time_s);
    void share_of_all(double time_s, double dt_s);

    bool running_ = false;
    double chord_time_s_ = 0.0;
    double open_flap_mean_ = 0.0;  // m^2, before the difference of the closed state
    double open_flap_variance_ = 0.0;
    double difference_variance_ = 0.0;
    double flap_prior_mean_ = 0.0;
    double flap_prior_variance_ = 0.0;
    double base_missing_ = 1.0;
    double base_decay_ = 1.0;
    std::array<double, kStartCount> start_time_s_{};
    double decay_dt_s_ = -1.0;
    Row missing_, decay_, tail_decay_, decay_step_, tail_step_;
    std::array<Row, kChassisCount> deviation_;  // one array over the candidates for each state
    StateVector whole_deviation_{};             // the same for a flap that stays wholly detached
    Row residual2_, flap_residual_, flap2_, stay_residual_, stay2_, cross_;
};

}  // namespace holdfast::core
