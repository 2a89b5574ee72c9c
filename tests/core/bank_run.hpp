// SPDX-License-Identifier: MIT
// A short closing for the bank, and beside it filters of their own, each run along one candidate's path of
// the missing share with the flap's size taken as known. What the bank carries as deviations has to be what
// these separate filters find. Only what makes the model linear is fixed: wind, gusts, the flap's slope with
// height and its front area have no variance.
#pragma once

#include <cmath>
#include <memory>
#include <random>
#include <vector>

#include "estimator/core/bank.hpp"
#include "estimator/core/measurements/accel_z.hpp"
#include "estimator/core/measurements/ride_height.hpp"
#include "tests/core/chassis_point.hpp"

namespace holdfast::testing {

// A filter for one candidate, flap size and area that stays detached.
struct SeparateFilter {
    std::size_t candidate;
    double flap_m2;
    double stay_m2;
    core::ChassisFilter chassis;
    double residual2 = 0.0;  // sum of innovation^2 / variance
};

class BankRun {
  public:
    static constexpr double kDt_s = 0.0025;
    static constexpr double kChordTime_s = 0.003;

    BankRun(std::uint64_t seed, const core::Regain& regain, double flap_front_m2)
        : random_(seed),
          chassis_(chassis_at_a_point(seed)),
          bank_(std::make_unique<core::ReattachmentBank>()) {
        auto& filter = chassis_.filter();
        for (const auto state : {core::kWindAlong, core::kWindAcross, core::kGust, core::kFlapAreaFront})
            filter.reset_state(state, 0.0);
        filter.x[core::kFlapAreaFront] = flap_front_m2;
        bank_->begin(filter, kChordTime_s, regain);
    }

    // Conditions the filter on the flap's size; before the first step.
    SeparateFilter& add(std::size_t candidate, double flap_m2, double stay_m2) {
        separate_.push_back({candidate, flap_m2, stay_m2, chassis_});
        auto& filter = separate_.back().chassis.filter();
        const auto& slope = filter.column(core::kFlapAreaRear);
        for (std::size_t i = 0; i < core::kFlapAreaRear; ++i)
            filter.x[i] += slope[i] * (flap_m2 - filter.x[core::kFlapAreaRear]);
        filter.x[core::kFlapAreaRear] = flap_m2;
        return separate_.back();
    }

    // From here on measured values are drawn from what the first separate filter expects: its candidate and
    // flap are the truth, and states, road and noise are what the model says they may be.
    void measure_the_first() { truth_is_first_ = true; }

    // The flap falls from 10 ms to 70 ms; measured values are the base's own plus noise.
    void run(int steps) {
        for (int i = 0; i < steps; ++i) step();
    }

    [[nodiscard]] core::ReattachmentBank& bank() { return *bank_; }
    [[nodiscard]] core::ChassisFilter::Filter& filter() { return chassis_.filter(); }
    [[nodiscard]] const std::vector<SeparateFilter>& separate() const { return separate_; }
    // A candidate's estimate as the bank has it.
    [[nodiscard]] ChassisVector by_bank(std::size_t candidate, double flap_m2, double stay_m2) {
        ChassisVector x = filter().x;
        for (std::size_t i = 0; i < core::kFlapAreaRear; ++i)
            x[i] += bank_->deviation(candidate, i, filter().column(core::kFlapAreaRear)[i], flap_m2, stay_m2);
        x[core::kFlapAreaRear] = flap_m2;
        return x;
    }

  private:
    void step() {
        time_s_ += kDt_s;
        core::ChassisInput in = small_car_input();
        in.dt_s = kDt_s;
        in.load_front_n += 300.0 * std::sin(40.0 * time_s_);
        in.load_rear_n += 800.0 * std::sin(25.0 * time_s_);
        in.dh_rear_m -= 0.02 * time_s_;
        const double position = std::clamp(1.0 - (time_s_ - 0.01) / 0.06, 0.0, 1.0);
        in.missing = bank_->advance(time_s_ - 0.5 * kDt_s, kDt_s, position);
        chassis_.predict(in);
        bank_->propagate(chassis_.last_step());
        for (SeparateFilter& s : separate_) {
            const double m = bank_->missing(s.candidate);
            in.missing = m + s.stay_m2 / s.flap_m2 * (1.0 - m);
            s.chassis.predict(in);
        }
        measure_accel_z(chassis_.last_step().heave_accel_mps2 + core::AccelZModel::kGravity +
                        0.5 * normal_(random_));
        for (const auto& model : {core::RideHeightModel{1.9, core::kRoadFront}, {-1.9, core::kRoadRear}})
            measure_height(model, model.predict(filter().x) + 4e-4 * normal_(random_));
    }

    void measure_accel_z(double measured) {
        constexpr double kVariance = 0.3;
        const core::ChassisStep& at = chassis_.last_step();
        const auto h = core::AccelZModel::J_accel_state(at);
        if (truth_is_first_) {
            const core::ChassisStep& true_step = separate_.front().chassis.last_step();
            measured = core::AccelZModel::predict(separate_.front().chassis.filter().x, true_step) +
                       drawn(core::AccelZModel::J_accel_state(true_step), kVariance);
        }
        double reaction = h[core::kFlapAreaRear];
        for (std::size_t i = 0; i < core::kFlapAreaRear; ++i)
            reaction += h[i] * filter().column(core::kFlapAreaRear)[i];
        const core::Innovation<double> innovation{measured - core::AccelZModel::predict(filter().x, at),
                                                  filter().expect(h, kVariance)};
        filter().apply(innovation.value);
        bank_->weigh(h, filter().gain(), innovation, reaction, at.heave_accel_per_missing_area);
        for (SeparateFilter& s : separate_) {
            const auto& own = s.chassis.last_step();
            update(s, core::AccelZModel::J_accel_state(own), kVariance,
                   measured - core::AccelZModel::predict(s.chassis.filter().x, own));
        }
    }

    void measure_height(const core::RideHeightModel& model, double measured) {
        constexpr double kVariance = 9e-8;
        const auto h = model.J_height_state();
        if (truth_is_first_)
            measured = model.predict(separate_.front().chassis.filter().x) + drawn(h, kVariance);
        double reaction = 0.0;
        for (std::size_t i = 0; i < core::kFlapAreaRear; ++i)
            reaction += h[i] * filter().column(core::kFlapAreaRear)[i];
        const core::Innovation<double> innovation{measured - model.predict(filter().x),
                                                  filter().expect(h, kVariance)};
        filter().apply(innovation.value);
        bank_->weigh(h, filter().gain(), innovation, reaction, 0.0);
        for (SeparateFilter& s : separate_)
            update(s, h, kVariance, measured - model.predict(s.chassis.filter().x));
    }

    // An innovation of the first separate filter.
    double drawn(const ChassisVector& h, double noise) {
        return std::sqrt(separate_.front().chassis.filter().expect(h, noise)) * normal_(random_);
    }

    static void update(SeparateFilter& s, const ChassisVector& h, double noise, double innovation) {
        s.residual2 += innovation * innovation / s.chassis.filter().expect(h, noise);
        s.chassis.filter().apply(innovation);
    }

    std::mt19937_64 random_;
    std::normal_distribution<double> normal_;
    bool truth_is_first_ = false;
    core::ChassisFilter chassis_;
    std::unique_ptr<core::ReattachmentBank> bank_;
    std::vector<SeparateFilter> separate_;
    double time_s_ = 0.0;
};

}  // namespace holdfast::testing
