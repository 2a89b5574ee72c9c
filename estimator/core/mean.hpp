// SPDX-License-Identifier: MIT
// A mean as it gathers.
#pragma once

namespace holdfast::core {

struct Mean {
    double sum = 0.0, count = 0.0;
    void add(double v) {
        sum += v;
        count += 1.0;
    }
    [[nodiscard]] bool any() const { return count > 0.0; }
    [[nodiscard]] double value() const { return sum / count; }  // of one at least
};

}  // namespace holdfast::core
