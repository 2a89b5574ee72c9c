// SPDX-License-Identifier: MIT
// Random covariances in factored form: U and D drawn, states of very different sizes.
#pragma once

#include <random>

#include "estimator/core/ud_filter.hpp"

namespace holdfast::testing {

// Standard deviations spread over `decades` powers of ten; entries of U up to 1 in units of them.
template <class Real, std::size_t N>
[[nodiscard]] core::UdFilter<Real, N> random_filter(std::mt19937_64& random, double decades) {
    std::uniform_real_distribution<double> share(-1.0, 1.0);
    std::array<double, N> scale{};
    for (double& s : scale) s = std::pow(10.0, 0.5 * decades * share(random));
    core::UdFilter<Real, N> filter;
    filter.set_diagonal({});
    for (std::size_t j = 0; j < N; ++j) {
        filter.diagonal(j) = static_cast<Real>(scale[j] * scale[j] * (1.05 + share(random)));
        for (std::size_t i = 0; i < j; ++i)
            filter.column(j)[i] = static_cast<Real>(scale[i] / scale[j] * share(random));
        filter.x[j] = static_cast<Real>(scale[j] * share(random));
    }
    return filter;
}

}  // namespace holdfast::testing
