// SPDX-License-Identifier: MIT
// Built where OpenCV is not installed.
#include "tests/bench/step/filters.hpp"

namespace holdfast::bench {

std::unique_ptr<ComparedFilter> make_opencv_filter(const LinearModel&) {
    return nullptr;
}

}  // namespace holdfast::bench
