// SPDX-License-Identifier: MIT
#include "estimator/core/usual.hpp"

#include <algorithm>
#include <cmath>

#include "estimator/core/small_math.hpp"

namespace holdfast::core {
namespace {

constexpr double kPriorLogMean = 3.6, kPriorLogSd = 0.40;
constexpr double kScatter = 0.12;        // of usual closings among themselves, in ln
constexpr double kUsualShare = 0.7;      // expected share of usual closings
constexpr double kSlowReach = 1.8;       // slow ones lie up to e^1.8 = 6 times above, evenly in ln
constexpr double kRegainScatter = 0.03;  // from closing to closing
constexpr double kRegainDrift = 0.01;
constexpr double kPriorTau_chords = 20.0;
constexpr double kPriorTauSpread = 1.2;  // in ln: from 6 to 66 chords within one standard deviation

}  // namespace

void Usual::learn(double log_chords, double log_sd, const std::array<double, kStartCount>& start_share,
                  const std::array<double, kShapeCount>& shape_share) {
    log_chords_[count_ % kCapacity] = log_chords;
    log_sd_[count_ % kCapacity] = log_sd;
    ++count_;
    for (std::size_t s = 0; s < kStartCount; ++s) start_weight_[s] += 3.0 * start_share[s];
    for (std::size_t s = 0; s < kShapeCount; ++s) shape_weight_[s] += shape_share[s];
    locate();
}

// Posterior of the usual value on a grid: each closing is usual (normal about it) or slow (evenly above it).
void Usual::locate() {
    constexpr int kGrid = 240;
    constexpr double kLeast = 2.0, kStep = 0.0125;  // 7 to 148 chords
    const std::size_t n = std::min(count_, kCapacity);
    std::array<double, kGrid> log_posterior{};
    double best = -1e300;
    for (int g = 0; g < kGrid; ++g) {
        const double m = kLeast + kStep * g;
        double sum = -0.5 * square((m - kPriorLogMean) / kPriorLogSd);
        for (std::size_t i = 0; i < n; ++i) {
            const double sd = std::hypot(log_sd_[i], kScatter);
            const double off = log_chords_[i] - m;
            const double usual = std::exp(-0.5 * square(off / sd)) / (2.5066 * sd);
            const double slow =
                0.5 * (std::erf(off / (sd * 1.41421356)) - std::erf((off - kSlowReach) / (sd * 1.41421356))) /
                kSlowReach;
            sum += std::log(kUsualShare * usual + (1.0 - kUsualShare) * slow + 1e-6);
        }
        log_posterior[g] = sum;
        best = std::max(best, sum);
    }
    double weight = 0.0, mean = 0.0, second = 0.0;
    for (int g = 0; g < kGrid; ++g) {
        const double m = kLeast + kStep * g;
        const double p = std::exp(log_posterior[g] - best);
        weight += p;
        mean += p * m;
        second += p * m * m;
    }
    mean /= weight;
    t95_ = {mean, std::sqrt(std::max(second / weight - mean * mean, square(0.02)))};
}

void Usual::learn_regain(double ratio, double ratio_sd) {
    const double measured = square(ratio_sd) + square(kRegainScatter);
    const double before = regain_variance_ + square(kRegainDrift);
    const double gain = before / (before + measured);
    regain_ += gain * (ratio - regain_);
    regain_variance_ = (1.0 - gain) * before;
}

Regain Usual::regain() const {
    return {regain_, std::sqrt(regain_variance_ + square(kRegainScatter))};
}

double Usual::tau_weight(double tau_in_chords) const {
    return std::exp(-0.5 * square(std::log(tau_in_chords / kPriorTau_chords) / kPriorTauSpread));
}

}  // namespace holdfast::core
