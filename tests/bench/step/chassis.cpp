// SPDX-License-Identifier: MIT
#include <cmath>

#include "tests/bench/step/filters.hpp"

namespace holdfast::bench {
namespace {

constexpr int kDriftEvery = 8;

class Chassis : public ComparedFilter {
  public:
    Chassis(const LinearModel& model, bool drift) : model_(model), drift_(drift), chassis_(model.car) {}

    void restart() override {
        chassis_ = core::ChassisFilter(model_.car);
        count_ = 0;
    }
    void step(const ModelStep& step) override {
        chassis_.predict(step.input);
        if (drift_ && ++count_ % kDriftEvery == 0) chassis_.drift(kDriftEvery * step.input.dt_s, false, 0.0);
        auto& filter = chassis_.filter();
        for (std::size_t i = 0; i < model_.measurements.size(); ++i) {
            const MeasurementModel& m = model_.measurements[i];
            double innovation = step.measured[i];
            for (std::size_t k = 0; k < kStates; ++k) innovation -= m.h[k] * filter.x[k];
            (void)filter.expect(m.h, m.noise_variance);
            filter.apply(innovation);
        }
    }
    State estimate() const override { return chassis_.filter().x; }
    State standard_deviation() const override {
        State sd{};
        for (std::size_t i = 0; i < kStates; ++i) sd[i] = std::sqrt(chassis_.filter().variance(i));
        return sd;
    }

  private:
    const LinearModel& model_;
    bool drift_;
    core::ChassisFilter chassis_;
    int count_ = 0;
};

}  // namespace

std::unique_ptr<ComparedFilter> make_chassis_filter(const LinearModel& model, bool drift) {
    return std::make_unique<Chassis>(model, drift);
}

}  // namespace holdfast::bench
