// SPDX-License-Identifier: MIT
// The contenders: Kalman filters of different make on one linear model.
#pragma once

#include <memory>

#include "tests/bench/step/linear_model.hpp"

namespace holdfast::bench {

class ComparedFilter {
  public:
    virtual ~ComparedFilter() = default;
    virtual void restart() = 0;  // to the model's state before its first step
    virtual void step(const ModelStep& step) = 0;
    [[nodiscard]] virtual State estimate() const = 0;
    [[nodiscard]] virtual State standard_deviation() const = 0;
};

// The project's chassis filter: builds the transition itself from the step's input, then scalar updates. With
// `drift`, its slow states change every eighth step, as they do in the engine at 400 Hz; the model of the
// others leaves that out.
[[nodiscard]] std::unique_ptr<ComparedFilter> make_chassis_filter(const LinearModel& model, bool drift);
// Plain matrices of dynamic size, as one writes them with Eigen: P = F P F^T + Q, standard and Joseph form.
[[nodiscard]] std::unique_ptr<ComparedFilter> make_eigen_filter(const LinearModel& model, bool joseph);
// cv::KalmanFilter; nullptr where the benchmark was built without OpenCV.
[[nodiscard]] std::unique_ptr<ComparedFilter> make_opencv_filter(const LinearModel& model);

}  // namespace holdfast::bench
