// SPDX-License-Identifier: MIT
#include "tests/bench/accuracy/bound.hpp"

#include <Eigen/Core>
#include <Eigen/LU>
#include <algorithm>
#include <array>
#include <cmath>
#include <limits>
#include <numbers>

#include "estimator/core/axle_heights.hpp"
#include "estimator/core/chassis_filter.hpp"
#include "estimator/core/measurements/accel_z.hpp"
#include "estimator/core/measurements/ride_height.hpp"
#include "estimator/core/small_math.hpp"

namespace holdfast::bench {
namespace {

using core::ChassisFilter;
using Vector = ChassisFilter::Filter::Vector;

constexpr double kSettle_s = 5.0;  // the gains are steady long before
constexpr double kWindow_s = 1.0;
constexpr double kLeastSpeedShare = 0.3;  // braking ends in a corner

// Spectral density of the road's vertical velocity, two-sided: ISO 8608, exponent 2.
double road_density_m2ps(double roughness_m3, double speed_mps) {
    constexpr double kReference_pm = 0.1;  // n0, cycles/m
    return 2.0 * core::square(std::numbers::pi * kReference_pm) * roughness_m3 * speed_mps;
}

enum Unknown : std::size_t { kLogTau, kFlap, kStart, kUnknownCount };
using ByUnknown = std::array<double, kUnknownCount>;

// Flow of first order, counted in time constants u since its start. Within a step the speed is constant.
class Flow {
  public:
    explicit Flow(const KnownClosing& closing) : closing_(closing) {}

    // What the step that ends at time_s has as its mean: derivatives of the missing area, m^2 per unit of the
    // unknown. The level with the flap open is known, so a larger flap counts only by what has come back.
    ByUnknown step(double time_s, double dt_s, double speed_mps) {
        const double flowing_s = std::clamp(time_s - closing_.start_s, 0.0, dt_s);
        if (flowing_s == 0.0) return {};
        const double rate_ps = speed_mps / (closing_.speed_mps * closing_.tau_s);
        if (u_ == 0.0) start_rate_ps_ = rate_ps;
        const double before = u_;
        u_ += rate_ps * flowing_s;
        // Integrals of e^-u and u e^-u over the step, in time.
        const double missing = (std::exp(-before) - std::exp(-u_)) / rate_ps;
        const double moment = ((before + 1.0) * std::exp(-before) - (u_ + 1.0) * std::exp(-u_)) / rate_ps;
        const double flap = closing_.flap_rear_m2;
        ByUnknown out{};
        out[kLogTau] = flap * moment / dt_s;
        out[kFlap] = (missing - flowing_s) / dt_s;
        out[kStart] = flap * start_rate_ps_ * missing / dt_s;
        return out;
    }

  private:
    const KnownClosing& closing_;
    double u_ = 0.0;
    double start_rate_ps_ = 0.0;
};

class Information {
  public:
    explicit Information(const KnownClosing& closing)
        : closing_(closing),
          chassis_(closing.car),
          front_{height_x(false), core::kRoadFront},
          rear_{height_x(true), core::kRoadRear},
          flow_(closing) {
        auto& filter = chassis_.filter();
        Vector variance{};
        for (std::size_t i = 0; i < core::kMovingCount; ++i) variance[i] = filter.variance(i);
        filter.set_diagonal(variance);  // the car itself is known
        for (std::size_t i = core::kMovingCount; i < core::kChassisCount; ++i) filter.x[i] = 0.0;
        filter.x[core::kFlapAreaRear] = closing.flap_rear_m2;
        filter.x[core::kFlapAreaFront] = closing.flap_front_m2;
        fisher_(kFlap, kFlap) = 1.0 / core::square(closing.flap_sd_m2);
        fisher_(kStart, kStart) = 1.0 / core::square(closing.start_sd_s);
    }

    // One frame; time_s is its own, the step before it is added.
    void step(double time_s) {
        const double dt = closing_.step_s;
        const double speed =
            std::max(closing_.speed_mps - closing_.braking_mps2 * std::max(time_s - closing_.brakes_s, 0.0),
                     kLeastSpeedShare * closing_.speed_mps);
        predict(dt, speed);
        missing_ = flow_.step(time_s, dt, speed);
        propagate();
        if (closing_.accel_z_noise_m2ps3 > 0.0) measure_accel_z();
        measure_height(front_, front_count_);
        measure_height(rear_, rear_count_);
    }

    [[nodiscard]] double tau_sd_s() const {
        const double flap_start = fisher_(kFlap, kStart);
        Eigen::Matrix2d nuisance;
        nuisance << fisher_(kFlap, kFlap), flap_start, flap_start, fisher_(kStart, kStart);
        const Eigen::Vector2d cross(fisher_(kLogTau, kFlap), fisher_(kLogTau, kStart));
        const double left = fisher_(kLogTau, kLogTau) - cross.dot(nuisance.inverse() * cross);
        return left > 0.0 ? closing_.tau_s / std::sqrt(left) : std::numeric_limits<double>::infinity();
    }

  private:
    double height_x(bool rear) {
        const core::AxleHeights heights(closing_.car, rear);
        (rear ? rear_count_ : front_count_) = static_cast<double>(heights.count());
        return heights.x_m() + chassis_.constants().cg_to_front_m;
    }

    void predict(double dt, double speed) {
        core::ChassisInput in;
        in.dt_s = dt;
        in.load_front_n = chassis_.constants().weight_front_n;
        in.load_rear_n = chassis_.constants().weight_rear_n;
        in.load_noise_front_n2s = in.load_noise_rear_n2s = closing_.load_noise_n2s;
        in.dynamic_pressure_pa = 0.5 * closing_.air_density_kgpm3 * speed * speed;
        in.speed_mps = speed;
        in.air_speed_measured = true;
        in.road_front_m2ps = in.road_rear_m2ps = road_density_m2ps(closing_.roughness_m3, speed);
        chassis_.predict(in);
    }

    void propagate() {
        const core::ChassisStep& step = chassis_.last_step();
        const double dt = step.dt_s;
        for (std::size_t p = 0; p < kUnknownCount; ++p) {
            Vector& d = deviation_[p];
            const double heave = missing_[p] * step.heave_accel_per_missing_area;
            const double pitch = missing_[p] * step.pitch_accel_per_missing_area;
            d[core::kHeave] += dt * d[core::kHeaveRate] + 0.5 * dt * dt * heave;
            d[core::kHeaveRate] += dt * heave;
            d[core::kPitch] += dt * d[core::kPitchRate] + 0.5 * dt * dt * pitch;
            d[core::kPitchRate] += dt * pitch;
        }
    }

    void measure_height(const core::RideHeightModel& model, double sensors) {
        if (sensors == 0.0) return;
        add(model.J_height_state(), closing_.height_noise_m2s / (closing_.step_s * sensors), 0.0);
    }

    // The prediction is of the measured loads: their noise of this step stands beside the sensor's own. That
    // it is the noise that has just moved the car too is not made use of.
    void measure_accel_z() {
        const core::ChassisStep& step = chassis_.last_step();
        const double loads =
            2.0 * closing_.load_noise_n2s / core::square(chassis_.constants().sprung_mass_kg);
        add(core::AccelZModel::J_accel_state(step), (closing_.accel_z_noise_m2ps3 + loads) / closing_.step_s,
            step.heave_accel_per_missing_area);
    }

    // [fisher]: dv/dp of one measurement whitened, and what the filter makes of it.
    void add(const Vector& h, double noise_variance, double direct) {
        auto& filter = chassis_.filter();
        const double variance = filter.expect(h, noise_variance);
        filter.apply(0.0);
        const Vector& gain = filter.gain();
        Eigen::Matrix<double, kUnknownCount, 1> reaction;
        for (std::size_t p = 0; p < kUnknownCount; ++p) {
            double sum = direct * missing_[p];
            for (std::size_t i = 0; i < core::kMovingCount; ++i) sum += h[i] * deviation_[p][i];
            for (std::size_t i = 0; i < core::kMovingCount; ++i) deviation_[p][i] -= gain[i] * sum;
            reaction[static_cast<Eigen::Index>(p)] = sum;
        }
        fisher_ += reaction * reaction.transpose() / variance;
    }

    const KnownClosing& closing_;
    ChassisFilter chassis_;
    double front_count_ = 0.0, rear_count_ = 0.0;
    core::RideHeightModel front_, rear_;
    Flow flow_;
    ByUnknown missing_{};
    std::array<Vector, kUnknownCount> deviation_{};
    Eigen::Matrix<double, kUnknownCount, kUnknownCount> fisher_ =
        Eigen::Matrix<double, kUnknownCount, kUnknownCount>::Zero();
};

}  // namespace

TauBound tau_bound(const KnownClosing& closing) {
    Information information(closing);
    TauBound bound{std::numeric_limits<double>::infinity(), 0.0};
    const double half = 0.5 * closing.step_s;
    const auto steps = [&](double seconds) { return std::lround(seconds / closing.step_s); };
    for (long k = steps(std::min(closing.start_s, 0.0) - kSettle_s); k <= steps(kWindow_s); ++k) {
        const double time_s = static_cast<double>(k) * closing.step_s;
        information.step(time_s);
        if (time_s < closing.brakes_s + half) bound.until_brakes_s = information.tau_sd_s();
    }
    bound.until_one_second_s = information.tau_sd_s();
    return bound;
}

}  // namespace holdfast::bench
