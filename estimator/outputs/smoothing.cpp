// SPDX-License-Identifier: MIT
#include "estimator/outputs/smoothing.hpp"

#include <Eigen/Cholesky>
#include <Eigen/Core>
#include <algorithm>
#include <cmath>

namespace holdfast::outputs {
namespace {

constexpr auto kN = static_cast<Eigen::Index>(core::kSlowCount);
using Vector = Eigen::Matrix<double, kN, 1>;
using Matrix = Eigen::Matrix<double, kN, kN>;

Vector vector_of(const std::array<double, core::kSlowCount>& a) {
    return Eigen::Map<const Vector>(a.data());
}
Matrix matrix_of(const std::array<double, core::kSlowCount * core::kSlowCount>& a) {
    return Eigen::Map<const Matrix>(a.data());  // symmetric: rows or columns are the same
}

}  // namespace

void Smoother::solve() {
    states_.assign(snapshots_.size(), State{});
    if (snapshots_.empty()) return;
    const auto store = [&](std::size_t k, const Vector& mean, const Matrix& covariance) {
        const Vector change = mean - vector_of(snapshots_[k].mean);
        Eigen::Map<Vector>(states_[k].change.data()) = change;
        Eigen::Map<Vector>(states_[k].mean.data()) = mean;
        Eigen::Map<Matrix>(states_[k].covariance.data()) = covariance;
    };
    std::size_t k = snapshots_.size() - 1;
    Vector mean = vector_of(snapshots_[k].mean);
    Matrix covariance = matrix_of(snapshots_[k].covariance);
    store(k, mean, covariance);
    while (k-- > 0) {
        const core::SlowSnapshot& next = snapshots_[k + 1];
        const Vector kept = vector_of(next.kept);
        const Vector filtered = vector_of(snapshots_[k].mean);
        const Matrix filtered_covariance = matrix_of(snapshots_[k].covariance);
        Matrix predicted = kept.asDiagonal() * filtered_covariance * kept.asDiagonal();
        predicted.diagonal() += vector_of(next.added);
        // States that nothing is known of (a wind that is measured) have no variance: a trace of it keeps
        // this solvable.
        predicted.diagonal().array() += 1e-12;
        const Matrix gain = predicted.ldlt().solve(kept.asDiagonal() * filtered_covariance).transpose();
        mean = filtered + gain * (mean - kept.cwiseProduct(filtered));
        covariance = filtered_covariance + gain * (covariance - predicted) * gain.transpose();
        covariance = 0.5 * (covariance + covariance.transpose()).eval();
        store(k, mean, covariance);
    }
}

void Smoother::apply(core::Estimate& e) const {
    if (states_.empty()) return;
    const double time_s = static_cast<double>(e.time_ns) * 1e-9;
    const auto after = std::lower_bound(snapshots_.begin(), snapshots_.end(), time_s,
                                        [](const core::SlowSnapshot& s, double t) { return s.time_s < t; });
    const auto right = static_cast<std::size_t>(
        std::min(after - snapshots_.begin(), static_cast<std::ptrdiff_t>(snapshots_.size()) - 1));
    const std::size_t left = right > 0 && snapshots_[right].time_s > time_s ? right - 1 : right;
    const double span = snapshots_[right].time_s - snapshots_[left].time_s;
    const double share = span > 0.0 ? std::clamp((time_s - snapshots_[left].time_s) / span, 0.0, 1.0) : 0.0;
    const Vector change =
        (1.0 - share) * vector_of(states_[left].change) + share * vector_of(states_[right].change);
    const Matrix covariance =
        (1.0 - share) * matrix_of(states_[left].covariance) + share * matrix_of(states_[right].covariance);
    const auto move = [&](core::Quantity& area, core::Quantity& downforce,
                          const std::array<double, core::kSlowCount>& by_slow, double other_variance) {
        const Vector slope = vector_of(by_slow);
        const double pressure = area.value != 0.0 ? downforce.value / area.value : 0.0;
        area.value += slope.dot(change);
        area.sd = std::sqrt(std::max(slope.dot(covariance * slope), 0.0) + other_variance);
        downforce = {pressure * area.value, pressure * area.sd};
    };
    move(e.cla_front_m2, e.downforce_front_n, e.front_by_slow, e.front_other_variance);
    move(e.cla_rear_m2, e.downforce_rear_n, e.rear_by_slow, e.rear_other_variance);
}

}  // namespace holdfast::outputs
