// SPDX-License-Identifier: MIT
// The bound of a closing's time constant, against maximum-likelihood estimates from drawn data. Data, filter
// and estimate are written anew here, as plain matrices of six states; only the question is shared.
#include <Eigen/Dense>
#include <catch2/catch.hpp>
#include <numbers>
#include <random>
#include <vector>

#include "tests/bench/accuracy/bound.hpp"
#include "tests/core/small_car.hpp"

namespace {

using holdfast::bench::KnownClosing;
using holdfast::bench::tau_bound;

// The closing of the design sketch: loads to 50 N, ride heights to 0.25 mm, 400 Hz, brakes after 200 ms.
KnownClosing sketch(double speed_mps, double tau_s) {
    KnownClosing closing;
    closing.car = holdfast::testing::small_car();
    closing.speed_mps = speed_mps;
    closing.tau_s = tau_s;
    closing.load_noise_n2s = 2.0 * 50.0 * 50.0 / 400.0;
    closing.height_noise_m2s = 0.25e-3 * 0.25e-3 / 400.0;
    return closing;
}

using State = Eigen::Matrix<double, 6, 1>;  // heave, its rate, pitch, its rate, road front and rear
using Square = Eigen::Matrix<double, 6, 6>;
using Heights = Eigen::Vector2d;
using Gain = Eigen::Matrix<double, 6, 2>;
using Unknowns = Eigen::Vector3d;  // ln tau, flap size, start

// Mean over [from, to] of the share that is back at a time constant tau from `start` on.
double share_back(double from, double to, double start, double tau) {
    if (to <= start) return 0.0;
    const double a = std::max(from, start) - start, b = to - start;
    return (b - a - tau * (std::exp(-a / tau) - std::exp(-b / tau))) / (to - from);
}

class PlainModel {
  public:
    static constexpr int kSettle = 1200;  // steps
    static constexpr int kWindow = 300;   // from 100 ms before the flap is shut on

    explicit PlainModel(const KnownClosing& closing) : closing_(closing), dt_(closing.step_s) {
        const auto& car = closing.car;
        const double front_kg =
            car.mass_kg.value * car.front_weight_share.value - 2.0 * car.front.unsprung_mass_kg.value;
        const double rear_kg =
            car.mass_kg.value * (1.0 - car.front_weight_share.value) - 2.0 * car.rear.unsprung_mass_kg.value;
        const double mass = front_kg + rear_kg;
        const double inertia = car.pitch_inertia_kgm2.value;
        const double a = car.wheelbase_m * rear_kg / mass;
        const double b = car.wheelbase_m - a;
        transition_.setIdentity();
        transition_(0, 1) = transition_(2, 3) = dt_;
        const double q = 0.5 * closing.air_density_kgpm3 * closing.speed_mps * closing.speed_mps;
        const double heave = -q / mass, pitch = -b * q / inertia;  // of one more square metre at the rear
        area_ << 0.5 * dt_ * dt_ * heave, dt_ * heave, 0.5 * dt_ * dt_ * pitch, dt_ * pitch, 0.0, 0.0;
        noise_in_.setZero();
        noise_in_.col(0) << 0.0, 1.0 / mass, 0.0, -a / inertia, 0.0, 0.0;
        noise_in_.col(1) << 0.0, 1.0 / mass, 0.0, b / inertia, 0.0, 0.0;
        noise_in_(4, 2) = noise_in_(5, 3) = 1.0;
        const double road =
            2.0 * std::pow(std::numbers::pi * 0.1, 2) * closing.roughness_m3 * closing.speed_mps;
        noise_sd_ << std::sqrt(closing.load_noise_n2s * dt_), std::sqrt(closing.load_noise_n2s * dt_),
            std::sqrt(road * dt_), std::sqrt(road * dt_);
        // One sensor in front, two behind, of which the mean is taken.
        const double x_front = car.ride_height[0].x_m + a, x_rear = car.ride_height[1].x_m + a;
        measure_ << 1.0, 0.0, -x_front, 0.0, -1.0, 0.0, 1.0, 0.0, -x_rear, 0.0, 0.0, -1.0;
        height_sd_ << std::sqrt(closing.height_noise_m2s / dt_),
            std::sqrt(closing.height_noise_m2s / dt_ / 2.0);
        start_sd_ << 0.02, 0.2, 0.01, 0.1, 0.02, 0.02;
        settle_gains();
    }

    // One draw: the flap's size and the start from their normals, motion and noise; the estimate's error in
    // units of tau.
    double error_of_a_draw(std::mt19937_64& random) const {
        std::normal_distribution<double> normal;
        const Unknowns prior(std::log(closing_.tau_s), closing_.flap_rear_m2, closing_.start_s);
        const Unknowns truth =
            prior + Unknowns(0.0, closing_.flap_sd_m2 * normal(random), closing_.start_sd_s * normal(random));
        State x, found = State::Zero();
        for (int i = 0; i < 6; ++i) x[i] = start_sd_[i] * normal(random);
        std::vector<Heights> data(kWindow);
        State at_command;
        for (int k = 0; k < kSettle + kWindow; ++k) {
            Eigen::Vector4d w;
            for (int i = 0; i < 4; ++i) w[i] = noise_sd_[i] * normal(random);
            x = transition_ * x + area_ * back(truth, k) + noise_in_ * w;
            Heights y = measure_ * x;
            for (int i = 0; i < 2; ++i) y[i] += height_sd_[i] * normal(random);
            if (k < kSettle) {
                found = transition_ * found;
                found += gain_[k] * (y - measure_ * found);
            } else {
                data[static_cast<std::size_t>(k - kSettle)] = y;
            }
            if (k == kSettle - 1) at_command = found;
        }
        return std::exp(best(data, at_command, prior)[0]) - closing_.tau_s;
    }

  private:
    [[nodiscard]] double back(const Unknowns& u, int k) const {
        const double to = (k - kSettle + 1) * dt_ - 0.1;
        return u[1] * share_back(to - dt_, to, u[2], std::exp(u[0]));
    }

    void settle_gains() {
        Square p = start_sd_.cwiseAbs2().asDiagonal();
        const Square added = noise_in_ * noise_sd_.cwiseAbs2().asDiagonal() * noise_in_.transpose();
        const Eigen::Matrix2d noise = height_sd_.cwiseAbs2().asDiagonal();
        for (int k = 0; k < kSettle + kWindow; ++k) {
            p = transition_ * p * transition_.transpose() + added;
            const Eigen::Matrix2d s = measure_ * p * measure_.transpose() + noise;
            gain_.push_back(p * measure_.transpose() * s.inverse());
            whiten_.push_back(s.llt().matrixL().solve(Eigen::Matrix2d::Identity()));
            const Square left = Square::Identity() - gain_.back() * measure_;
            p = left * p * left.transpose() + gain_.back() * noise * gain_.back().transpose();
        }
    }

    // Whitened innovations of the window, then the priors' own terms.
    [[nodiscard]] Eigen::VectorXd residuals(const std::vector<Heights>& data, State x, const Unknowns& u,
                                            const Unknowns& prior) const {
        Eigen::VectorXd r(2 * kWindow + 2);
        for (int k = 0; k < kWindow; ++k) {
            const auto step = static_cast<std::size_t>(kSettle + k);
            x = transition_ * x + area_ * back(u, kSettle + k);
            const Heights innovation = data[static_cast<std::size_t>(k)] - measure_ * x;
            r.segment<2>(2 * k) = whiten_[step] * innovation;
            x += gain_[step] * innovation;
        }
        r[2 * kWindow] = (u[1] - prior[1]) / closing_.flap_sd_m2;
        r[2 * kWindow + 1] = (u[2] - prior[2]) / closing_.start_sd_s;
        return r;
    }

    // Least squares after Levenberg and Marquardt, from a start well off the truth.
    [[nodiscard]] Unknowns best(const std::vector<Heights>& data, const State& x,
                                const Unknowns& prior) const {
        Unknowns u = prior + Unknowns(0.3, 0.0, 0.0);
        Eigen::VectorXd r = residuals(data, x, u, prior);
        double damping = 1e-3;
        const Unknowns nudge(1e-5, 1e-6, 1e-7);
        for (int i = 0; i < 60; ++i) {
            Eigen::MatrixXd slope(r.size(), 3);
            for (int p = 0; p < 3; ++p) {
                Unknowns moved = u;
                moved[p] += nudge[p];
                slope.col(p) = (residuals(data, x, moved, prior) - r) / nudge[p];
            }
            Eigen::Matrix3d normal = slope.transpose() * slope;
            normal.diagonal() *= 1.0 + damping;
            const Unknowns change = normal.ldlt().solve(-slope.transpose() * r);
            const Eigen::VectorXd tried = residuals(data, x, u + change, prior);
            if (tried.squaredNorm() < r.squaredNorm()) {
                const double gained = r.squaredNorm() - tried.squaredNorm();
                u += change;
                r = tried;
                damping *= 0.3;
                if (gained < 1e-7) break;
            } else {
                damping *= 10.0;
                if (damping > 1e6) break;
            }
        }
        return u;
    }

    KnownClosing closing_;
    double dt_;
    Square transition_;
    State area_;
    Eigen::Matrix<double, 6, 4> noise_in_;
    Eigen::Vector4d noise_sd_;
    Eigen::Matrix<double, 2, 6> measure_;
    Heights height_sd_;
    State start_sd_;
    std::vector<Gain> gain_;
    std::vector<Eigen::Matrix2d> whiten_;
};

}  // namespace

TEST_CASE("maximum-likelihood estimates of drawn closings scatter by the bound, seeds 1 and 2") {
    struct Case {
        double tau_s;
        std::uint64_t seed;
    };
    const Case c = GENERATE(Case{0.035, 1}, Case{0.080, 2});
    INFO("tau " << c.tau_s << " s, seed " << c.seed);
    KnownClosing closing = sketch(90.0, c.tau_s);
    const PlainModel model(closing);
    // The window of the plain model: 650 ms after the flap is shut, no brakes.
    closing.brakes_s = PlainModel::kWindow * closing.step_s - 0.1;
    const double bound = tau_bound(closing).until_brakes_s;
    constexpr int kDraws = 400;
    std::mt19937_64 random(c.seed);
    double sum2 = 0.0, sum = 0.0;
    for (int i = 0; i < kDraws; ++i) {
        const double error = model.error_of_a_draw(random) / bound;
        sum += error;
        sum2 += error * error;
    }
    INFO("bound " << 1e3 * bound << " ms, mean error over it " << sum / kDraws);
    // Mean of so many squares of normals: chi-square bounds, 99.8 %, after Wilson & Hilferty (Proc. National
    // Academy of Sciences 17, 1931).
    const double spread = 3.0902 * std::sqrt(2.0 / (9.0 * kDraws));
    CHECK(sum2 / kDraws > std::pow(1.0 - 2.0 / (9.0 * kDraws) - spread, 3));
    CHECK(sum2 / kDraws < std::pow(1.0 - 2.0 / (9.0 * kDraws) + spread, 3));
    CHECK(std::abs(sum / kDraws) < 0.2);
}

TEST_CASE("bounds are of the size that a hand-made sketch of the filter had found") {
    // The sketch's figures, ms, at 90 m/s: its car was another one, so only the size is to agree.
    struct Row {
        double tau_ms, bound_ms;
    };
    for (const Row& row : {Row{35.0, 3.0}, {110.0, 8.0}, {160.0, 12.0}}) {
        INFO("tau " << row.tau_ms << " ms");
        const double fast = 1e3 * tau_bound(sketch(90.0, 1e-3 * row.tau_ms)).until_brakes_s;
        const double slow = 1e3 * tau_bound(sketch(60.0, 1e-3 * row.tau_ms)).until_brakes_s;
        CHECK(fast > 0.5 * row.bound_ms);
        CHECK(fast < 2.0 * row.bound_ms);
        CHECK(slow / fast > 1.1);  // "about half as good again"
        CHECK(slow / fast < 2.3);
    }
}

TEST_CASE("more data, better sensors and more knowledge lower the bound") {
    const KnownClosing usual = sketch(80.0, 0.06);
    const auto bound = tau_bound(usual);
    CHECK(bound.until_one_second_s < bound.until_brakes_s);
    const auto with = [&](auto&& change) {
        KnownClosing closing = usual;
        change(closing);
        return tau_bound(closing).until_brakes_s;
    };
    CHECK(with([](auto& c) { c.brakes_s = 0.4; }) < bound.until_brakes_s);
    CHECK(with([](auto& c) { c.load_noise_n2s *= 0.25; }) < bound.until_brakes_s);
    CHECK(with([](auto& c) { c.height_noise_m2s *= 0.25; }) < bound.until_brakes_s);
    CHECK(with([](auto& c) { c.roughness_m3 *= 0.25; }) < bound.until_brakes_s);
    CHECK(with([](auto& c) { c.flap_sd_m2 *= 0.25; }) < bound.until_brakes_s);
    CHECK(with([](auto& c) { c.start_sd_s *= 0.25; }) < bound.until_brakes_s);
    CHECK(with([](auto& c) { c.accel_z_noise_m2ps3 = 0.5 * 0.5 / 400.0; }) < bound.until_brakes_s);
    CHECK(with([](auto& c) { c.flap_rear_m2 *= 2.0; }) < bound.until_brakes_s);
    // As many samples again, each as noisy as before, halve the density: the rate itself hardly matters.
    CHECK(with([](auto& c) { c.step_s = 0.00125; }) == Approx(bound.until_brakes_s).epsilon(0.05));
}

TEST_CASE("brakes before the flow comes back leave no bound, and the second after them a finite one") {
    KnownClosing closing = sketch(80.0, 0.06);
    closing.start_s = 0.02;
    closing.brakes_s = 0.01;
    closing.braking_mps2 = 40.0;
    const auto bound = tau_bound(closing);
    CHECK(std::isinf(bound.until_brakes_s));
    CHECK(bound.until_one_second_s > 0.0);
    closing.braking_mps2 = 0.0;
    CHECK(tau_bound(closing).until_one_second_s < bound.until_one_second_s);  // at speed the flow says more
}
