// SPDX-License-Identifier: MIT
// A linear system of which some states move and the rest bias them and stay (the bias partition), and its
// time update written as ud_filter.hpp asks its callers to write it.
#pragma once

#include <array>
#include <cstddef>

#include "estimator/core/ud_filter.hpp"
#include "tests/dense.hpp"

namespace holdfast::testing {

// Transition that moves the first M states, noise of Q inputs on them.
template <std::size_t N, std::size_t M, std::size_t Q>
struct MovingSystem {
    Matrix<N> f = identity<N>();
    Matrix<M, Q> input{};
    std::array<double, Q> q{};
};

template <class Real, std::size_t N, std::size_t M, std::size_t Q>
void predict(core::UdFilter<Real, N>& filter, const MovingSystem<N, M, Q>& system) {
    const auto moved = [&](const auto& column, std::size_t last, std::size_t i) {
        Real value = 0;
        for (std::size_t k = 0; k <= last; ++k) value += static_cast<Real>(system.f[i][k]) * column[k];
        return value;
    };
    const auto x = filter.x;
    for (std::size_t i = 0; i < M; ++i) filter.x[i] = moved(x, N - 1, i);
    std::array<std::array<Real, M + Q>, M> rows{};
    for (std::size_t j = 0; j < N; ++j) {
        const auto column = filter.column(j);
        for (std::size_t i = 0; i < M; ++i) (j < M ? rows[i][j] : filter.column(j)[i]) = moved(column, j, i);
    }
    std::array<Real, Q> q{};
    for (std::size_t k = 0; k < Q; ++k) q[k] = static_cast<Real>(system.q[k]);
    for (std::size_t i = 0; i < M; ++i)
        for (std::size_t k = 0; k < Q; ++k) rows[i][M + k] = static_cast<Real>(system.input[i][k]);
    filter.template triangularize<M, Q>(rows, q);
}

}  // namespace holdfast::testing
