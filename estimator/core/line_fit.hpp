// SPDX-License-Identifier: MIT
// Straight line through points by least squares, one point at a time.
#pragma once

#include <algorithm>
#include <cmath>

namespace holdfast::core {

class LineFit {
  public:
    void add(double x, double y) {
        if (n_ == 0.0) origin_ = x;
        x -= origin_;
        n_ += 1.0;
        x_ += x;
        y_ += y;
        xx_ += x * x;
        xy_ += x * y;
        yy_ += y * y;
    }
    [[nodiscard]] double count() const { return n_; }
    [[nodiscard]] bool falls() const { return n_ >= 3.0 && spread() > 0.0 && slope() < 0.0; }
    // Where the line meets zero; only where falls().
    [[nodiscard]] double zero() const { return origin_ + (x_ - y_ / slope()) / n_; }
    // Root mean square distance of the points in y.
    [[nodiscard]] double scatter() const {
        const double b = slope();
        const double a = (y_ - b * x_) / n_;
        const double sum = yy_ + n_ * a * a + b * b * xx_ - 2.0 * a * y_ - 2.0 * b * xy_ + 2.0 * a * b * x_;
        return std::sqrt(std::max(sum, 0.0) / n_);
    }

  private:
    [[nodiscard]] double spread() const { return n_ * xx_ - x_ * x_; }
    [[nodiscard]] double slope() const { return (n_ * xy_ - x_ * y_) / spread(); }

    double n_ = 0.0, x_ = 0.0, y_ = 0.0, xx_ = 0.0, xy_ = 0.0, yy_ = 0.0, origin_ = 0.0;
};

}  // namespace holdfast::core
