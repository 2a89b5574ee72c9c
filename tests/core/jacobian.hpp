// SPDX-License-Identifier: MIT
// A Jacobian held against central differences, in one line:
//     check_jacobian(x, J, steps, [&](const auto& at) { return model(at); });
#pragma once

#include <array>
#include <catch2/catch.hpp>
#include <cmath>
#include <cstddef>

namespace holdfast::testing {

// steps: by how much each state is moved to both sides; 1e-6 of the largest effect is the tolerance.
template <std::size_t N, class Function>
void check_jacobian(const std::array<double, N>& x, const std::array<double, N>& jacobian,
                    const std::array<double, N>& steps, Function&& function, double tolerance = 1e-6) {
    std::array<double, N> effect{};
    double largest = 0.0;
    for (std::size_t i = 0; i < N; ++i) {
        auto above = x, below = x;
        above[i] += steps[i];
        below[i] -= steps[i];
        effect[i] = 0.5 * (function(above) - function(below));
        largest = std::max(largest, std::abs(effect[i]));
    }
    REQUIRE(largest > 0.0);
    for (std::size_t i = 0; i < N; ++i) {
        INFO("state " << i << ": numeric " << effect[i] / steps[i] << ", stated " << jacobian[i]);
        CHECK(jacobian[i] * steps[i] == Approx(effect[i]).epsilon(1e-6).margin(tolerance * largest));
    }
}

}  // namespace holdfast::testing
