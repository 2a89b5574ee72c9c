// SPDX-License-Identifier: MIT
#include <Eigen/Cholesky>
#include <Eigen/Core>
#include <cmath>

#include "tests/bench/step/filters.hpp"

namespace holdfast::bench {
namespace {

using Eigen::Index;
using Eigen::MatrixXd;
using Eigen::VectorXd;

constexpr auto kN = static_cast<Index>(kStates);

VectorXd vector(const State& state) {
    return Eigen::Map<const VectorXd>(state.data(), kN);
}
State state(const VectorXd& vector) {
    State out{};
    Eigen::Map<VectorXd>(out.data(), kN) = vector;
    return out;
}

class EigenFilter : public ComparedFilter {
  public:
    EigenFilter(const LinearModel& model, bool joseph)
        : model_(model),
          joseph_(joseph),
          count_(static_cast<Index>(model.measurements.size())),
          F_(MatrixXd::Identity(kN, kN)),
          Q_(kN, kN),
          H_(count_, kN),
          R_(MatrixXd::Zero(count_, count_)),
          I_(MatrixXd::Identity(kN, kN)) {
        for (Index i = 0; i < kN; ++i) Q_.row(i) = vector(model.process_noise[static_cast<std::size_t>(i)]);
        for (Index i = 0; i < count_; ++i) {
            const MeasurementModel& m = model.measurements[static_cast<std::size_t>(i)];
            H_.row(i) = vector(m.h);
            R_(i, i) = m.noise_variance;
        }
        restart();
    }
    void restart() override {
        x_ = vector(model_.x);
        P_ = vector(model_.variance).asDiagonal();
    }
    void step(const ModelStep& step) override {
        set_transition(step);
        x_ = F_ * x_ + vector(step.known);
        P_ = F_ * P_ * F_.transpose() + Q_;

        const Eigen::Map<const VectorXd> z(step.measured.data(), count_);
        const MatrixXd PHt = P_ * H_.transpose();
        const MatrixXd S = H_ * PHt + R_;
        const MatrixXd K = S.llt().solve(PHt.transpose()).transpose();
        x_ += K * (z - H_ * x_);
        if (joseph_) {
            const MatrixXd A = I_ - K * H_;
            P_ = A * P_ * A.transpose() + K * R_ * K.transpose();
        } else {
            P_ -= K * PHt.transpose();
        }
    }
    State estimate() const override { return state(x_); }
    State standard_deviation() const override { return state(P_.diagonal().cwiseSqrt()); }

  private:
    void set_transition(const ModelStep& step) {
        const double dt = step.input.dt_s;
        for (Index p = core::kMovingCount; p < kN; ++p) {
            const double heave = step.heave_accel_by_state[static_cast<std::size_t>(p)];
            const double pitch = step.pitch_accel_by_state[static_cast<std::size_t>(p)];
            F_(core::kHeave, p) = 0.5 * dt * dt * heave;
            F_(core::kHeaveRate, p) = dt * heave;
            F_(core::kPitch, p) = 0.5 * dt * dt * pitch;
            F_(core::kPitchRate, p) = dt * pitch;
        }
        F_(core::kHeave, core::kHeaveRate) = F_(core::kPitch, core::kPitchRate) = dt;
    }

    const LinearModel& model_;
    bool joseph_;
    Index count_;
    MatrixXd F_, Q_, H_, R_, I_, P_;
    VectorXd x_;
};

}  // namespace

std::unique_ptr<ComparedFilter> make_eigen_filter(const LinearModel& model, bool joseph) {
    return std::make_unique<EigenFilter>(model, joseph);
}

}  // namespace holdfast::bench
