// SPDX-License-Identifier: MIT
#include <cmath>
#include <opencv2/core.hpp>
#include <opencv2/video/tracking.hpp>

#include "tests/bench/step/filters.hpp"

namespace holdfast::bench {
namespace {

constexpr int kN = static_cast<int>(kStates);

std::size_t at(int i) {
    return static_cast<std::size_t>(i);
}

class OpenCvFilter : public ComparedFilter {
  public:
    explicit OpenCvFilter(const LinearModel& model)
        : model_(model),
          count_(static_cast<int>(model.measurements.size())),
          filter_(kN, count_, 0, CV_64F),
          measured_(count_, 1, CV_64F) {
        cv::setNumThreads(1);
        for (int i = 0; i < kN; ++i)
            for (int k = 0; k < kN; ++k)
                filter_.processNoiseCov.at<double>(i, k) = model.process_noise[at(i)][at(k)];
        filter_.measurementNoiseCov.setTo(0.0);
        for (int i = 0; i < count_; ++i) {
            const MeasurementModel& m = model.measurements[at(i)];
            for (int k = 0; k < kN; ++k) filter_.measurementMatrix.at<double>(i, k) = m.h[at(k)];
            filter_.measurementNoiseCov.at<double>(i, i) = m.noise_variance;
        }
        restart();
    }
    void restart() override {
        filter_.errorCovPost.setTo(0.0);
        for (int i = 0; i < kN; ++i) {
            filter_.statePost.at<double>(i) = model_.x[at(i)];
            filter_.errorCovPost.at<double>(i, i) = model_.variance[at(i)];
        }
    }
    void step(const ModelStep& step) override {
        set_transition(step);
        filter_.predict();
        for (int i = 0; i < kN; ++i) filter_.statePre.at<double>(i) += step.known[at(i)];
        for (int i = 0; i < count_; ++i) measured_.at<double>(i) = step.measured[at(i)];
        filter_.correct(measured_);
    }
    State estimate() const override {
        State out{};
        for (int i = 0; i < kN; ++i) out[at(i)] = filter_.statePost.at<double>(i);
        return out;
    }
    State standard_deviation() const override {
        State out{};
        for (int i = 0; i < kN; ++i) out[at(i)] = std::sqrt(filter_.errorCovPost.at<double>(i, i));
        return out;
    }

  private:
    void set_transition(const ModelStep& step) {
        cv::Mat& F = filter_.transitionMatrix;
        const double dt = step.input.dt_s;
        for (int p = core::kMovingCount; p < kN; ++p) {
            const double heave = step.heave_accel_by_state[at(p)];
            const double pitch = step.pitch_accel_by_state[at(p)];
            F.at<double>(core::kHeave, p) = 0.5 * dt * dt * heave;
            F.at<double>(core::kHeaveRate, p) = dt * heave;
            F.at<double>(core::kPitch, p) = 0.5 * dt * dt * pitch;
            F.at<double>(core::kPitchRate, p) = dt * pitch;
        }
        F.at<double>(core::kHeave, core::kHeaveRate) = F.at<double>(core::kPitch, core::kPitchRate) = dt;
    }

    const LinearModel& model_;
    int count_;
    cv::KalmanFilter filter_;
    cv::Mat measured_;
};

}  // namespace

std::unique_ptr<ComparedFilter> make_opencv_filter(const LinearModel& model) {
    return std::make_unique<OpenCvFilter>(model);
}

}  // namespace holdfast::bench
