// SPDX-License-Identifier: MIT
// The smoother against outside values and against a solution that knows nothing of recursions.
#include <Eigen/Cholesky>
#include <Eigen/Core>
#include <catch2/catch.hpp>
#include <random>
#include <vector>

#include "estimator/outputs/smoothing.hpp"
#include "tests/reference/nile.hpp"

namespace {

using namespace holdfast;
using Eigen::MatrixXd;
using Eigen::VectorXd;

constexpr auto kN = static_cast<Eigen::Index>(core::kSlowCount);

// x_k = kept_k x_(k-1) + w_k, w_k of diagonal variance added_k; z_k = H_k x_k + noise of variance R.
struct LinearSystem {
    struct Step {
        VectorXd kept, added;
        MatrixXd h;
        VectorXd measured;
    };
    VectorXd mean;        // before the first measurement
    MatrixXd covariance;  // the same
    double noise = 1.0;
    std::vector<Step> steps;  // the first one's kept and added are not used
};

core::SlowSnapshot snapshot_of(const VectorXd& mean, const MatrixXd& covariance,
                               const LinearSystem::Step& step) {
    core::SlowSnapshot s;
    Eigen::Map<VectorXd>(s.mean.data(), kN) = mean;
    Eigen::Map<MatrixXd>(s.covariance.data(), kN, kN) = covariance;
    Eigen::Map<VectorXd>(s.kept.data(), kN) = step.kept;
    Eigen::Map<VectorXd>(s.added.data(), kN) = step.added;
    return s;
}

// A plain Kalman filter, whose estimates are the snapshots.
outputs::Smoother smoothed(const LinearSystem& system) {
    outputs::Smoother smoother;
    VectorXd x = system.mean;
    MatrixXd p = system.covariance;
    bool first = true;
    for (const auto& step : system.steps) {
        if (!first) {
            x = step.kept.cwiseProduct(x);
            p = step.kept.asDiagonal() * p * step.kept.asDiagonal();
            p.diagonal() += step.added;
        }
        first = false;
        const MatrixXd s =
            step.h * p * step.h.transpose() + system.noise * MatrixXd::Identity(step.h.rows(), step.h.rows());
        const MatrixXd gain = s.llt().solve(step.h * p).transpose();
        x += gain * (step.measured - step.h * x);
        p -= gain * s * gain.transpose();
        p = 0.5 * (p + p.transpose()).eval();
        smoother.add(snapshot_of(x, p, step));
    }
    smoother.solve();
    return smoother;
}

struct Gaussian {
    VectorXd mean;
    MatrixXd covariance;
};

// The states of all times as one vector, conditioned on all measurements at once.
Gaussian all_at_once(const LinearSystem& system) {
    const auto count = static_cast<Eigen::Index>(system.steps.size());
    VectorXd mean(count * kN);
    MatrixXd covariance(count * kN, count * kN);
    VectorXd m = system.mean;
    MatrixXd p = system.covariance;
    Eigen::Index rows = 0;
    for (Eigen::Index k = 0; k < count; ++k) {
        const auto& step = system.steps[static_cast<std::size_t>(k)];
        if (k > 0) {
            m = step.kept.cwiseProduct(m);
            p = step.kept.asDiagonal() * p * step.kept.asDiagonal();
            p.diagonal() += step.added;
            covariance.block(k * kN, 0, kN, k * kN) =
                step.kept.asDiagonal() * covariance.block((k - 1) * kN, 0, kN, k * kN);
            covariance.block(0, k * kN, k * kN, kN) = covariance.block(k * kN, 0, kN, k * kN).transpose();
        }
        mean.segment(k * kN, kN) = m;
        covariance.block(k * kN, k * kN, kN, kN) = p;
        rows += step.h.rows();
    }
    MatrixXd h = MatrixXd::Zero(rows, count * kN);
    VectorXd measured(rows);
    Eigen::Index row = 0;
    for (Eigen::Index k = 0; k < count; ++k) {
        const auto& step = system.steps[static_cast<std::size_t>(k)];
        h.block(row, k * kN, step.h.rows(), kN) = step.h;
        measured.segment(row, step.h.rows()) = step.measured;
        row += step.h.rows();
    }
    const MatrixXd s = h * covariance * h.transpose() + system.noise * MatrixXd::Identity(rows, rows);
    const MatrixXd gain = s.llt().solve(h * covariance).transpose();
    return {mean + gain * (measured - h * mean), covariance - gain * h * covariance};
}

LinearSystem random_system(std::uint64_t seed) {
    std::mt19937_64 random(seed);
    std::normal_distribution<double> normal;
    const auto draw = [&](Eigen::Index rows, Eigen::Index columns) {
        return MatrixXd::NullaryExpr(rows, columns, [&] { return normal(random); });
    };
    LinearSystem system;
    system.mean = draw(kN, 1);
    const MatrixXd root = draw(kN, kN);
    system.covariance = root * root.transpose() / static_cast<double>(kN);
    system.noise = 0.3;
    for (int k = 0; k < 8; ++k) {
        LinearSystem::Step step;
        step.kept = (1.0 - 0.2 * draw(kN, 1).array().abs()).matrix();
        step.added = (0.05 * draw(kN, 1).array().square()).matrix();
        step.h = draw(2, kN);
        step.measured = draw(2, 1) * 3.0;
        system.steps.push_back(step);
    }
    return system;
}

}  // namespace

TEST_CASE("Nile, smoothed: the published values of the local level") {
    LinearSystem nile;
    nile.mean = VectorXd::Zero(kN);
    nile.covariance = MatrixXd::Zero(kN, kN);
    nile.covariance(0, 0) = 1e7;
    nile.noise = testing::kNileNoise;
    for (const double flow : testing::kNile) {
        LinearSystem::Step step;
        step.kept = VectorXd::Ones(kN);
        step.added = VectorXd::Zero(kN);
        step.added(0) = testing::kNileLevelNoise;
        step.h = MatrixXd::Zero(1, kN);
        step.h(0, 0) = 1.0;
        step.measured = VectorXd::Constant(1, flow);
        nile.steps.push_back(step);
    }
    const auto smoother = smoothed(nile);
    // Computed with statsmodels 0.13.5 from an exactly diffuse beginning. Ours begins at 0 with variance 1e7,
    // which moves the first year's level by 1.7; of that the steady filter (gain 0.267) leaves 0.733^49, some
    // 4e-7, at year 50.
    CHECK(smoother.states()[49].mean[0] == Approx(834.763259).margin(2e-6));
    CHECK(smoother.states()[49].covariance[0] == Approx(2326.756870).margin(2e-6));
    CHECK(smoother.states()[99].mean[0] == Approx(798.370293).margin(2e-6));
    CHECK(smoother.states()[99].covariance[0] == Approx(4032.157942).margin(2e-6));
    CHECK(smoother.states()[99].change[0] == 0.0);
}

TEST_CASE("the smoother is the joint Gaussian of all times given all measurements") {
    const std::uint64_t seed = GENERATE(1, 2, 3, 4, 5);
    INFO("seed " << seed);
    const LinearSystem system = random_system(seed);
    const auto smoother = smoothed(system);
    const Gaussian joint = all_at_once(system);
    REQUIRE(smoother.states().size() == system.steps.size());
    for (std::size_t k = 0; k < system.steps.size(); ++k) {
        const auto& state = smoother.states()[k];
        const auto at = static_cast<Eigen::Index>(k) * kN;
        const Eigen::Map<const VectorXd> mean(state.mean.data(), kN);
        const Eigen::Map<const MatrixXd> covariance(state.covariance.data(), kN, kN);
        INFO("time " << k);
        CHECK((mean - joint.mean.segment(at, kN)).cwiseAbs().maxCoeff() < 1e-7);
        CHECK((covariance - joint.covariance.block(at, at, kN, kN)).cwiseAbs().maxCoeff() < 1e-7);
    }
}
