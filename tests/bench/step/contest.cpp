// SPDX-License-Identifier: MIT
#include "tests/bench/step/contest.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "tests/bench/step/processor_time.hpp"

namespace holdfast::bench {
namespace {

// Short, so that a round meets one state of the caches and of the clock rate.
constexpr std::size_t kRoundSteps = 200;

double quantile(std::vector<double> values, double share) {
    std::sort(values.begin(), values.end());
    return values[static_cast<std::size_t>(share * static_cast<double>(values.size() - 1) + 0.5)];
}

// The round's share of the model's steps; the model begins anew where it has ended.
double run_us_per_step(const LinearModel& model, ComparedFilter& filter, std::size_t round) {
    const std::size_t first = round * kRoundSteps % model.steps.size();
    const std::size_t last = std::min(first + kRoundSteps, model.steps.size());
    if (first == 0) filter.restart();
    const double begin = processor_us();
    for (std::size_t k = first; k < last; ++k) filter.step(model.steps[k]);
    return (processor_us() - begin) / static_cast<double>(last - first);
}

}  // namespace

Disagreement compare(const LinearModel& model, ComparedFilter& reference, ComparedFilter& other) {
    reference.restart();
    other.restart();
    Disagreement most;
    const auto note = [](double& worst, double value) {  // a NaN must not pass for agreement
        worst = std::max(worst, std::isnan(value) ? std::numeric_limits<double>::infinity() : value);
    };
    for (const ModelStep& step : model.steps) {
        reference.step(step);
        other.step(step);
        const State x = reference.estimate(), y = other.estimate();
        const State sd = reference.standard_deviation(), other_sd = other.standard_deviation();
        for (std::size_t i = 0; i < kStates; ++i) {
            note(most.estimate_sd, std::abs(x[i] - y[i]) / sd[i]);
            note(most.sd_relative, std::abs(other_sd[i] / sd[i] - 1.0));
        }
    }
    return most;
}

std::vector<Cost> race(const LinearModel& model, const std::vector<Contender>& contenders,
                       std::size_t rounds) {
    std::vector<std::vector<double>> us(contenders.size()), ratio(contenders.size());
    for (std::size_t round = 0; round < rounds; ++round) {
        std::vector<double> now(contenders.size(), 0.0);
        for (std::size_t i = 0; i < contenders.size(); ++i)
            if (contenders[i].filter) now[i] = run_us_per_step(model, *contenders[i].filter, round);
        if (round == 0) continue;  // warms up
        for (std::size_t i = 0; i < contenders.size(); ++i) {
            us[i].push_back(now[i]);
            ratio[i].push_back(now[i] / now[0]);
        }
    }
    std::vector<Cost> costs;
    for (std::size_t i = 0; i < contenders.size(); ++i) {
        costs.push_back({quantile(us[i], 0.5), quantile(ratio[i], 0.5), quantile(ratio[i], 0.25),
                         quantile(ratio[i], 0.75)});
    }
    return costs;
}

}  // namespace holdfast::bench
