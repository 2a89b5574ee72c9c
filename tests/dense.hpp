// SPDX-License-Identifier: MIT
// Plain matrices in long double, written out by definition: what the factored forms are held against.
#pragma once

#include <algorithm>
#include <array>
#include <cmath>
#include <cstddef>

#include "estimator/core/ud_filter.hpp"

namespace holdfast::testing {

template <std::size_t R, std::size_t C = R>
using Matrix = std::array<std::array<long double, C>, R>;

template <std::size_t N>
[[nodiscard]] Matrix<N> identity() {
    Matrix<N> m{};
    for (std::size_t i = 0; i < N; ++i) m[i][i] = 1.0L;
    return m;
}

template <std::size_t R, std::size_t K, std::size_t C>
[[nodiscard]] Matrix<R, C> product(const Matrix<R, K>& a, const Matrix<K, C>& b) {
    Matrix<R, C> m{};
    for (std::size_t i = 0; i < R; ++i)
        for (std::size_t k = 0; k < K; ++k)
            for (std::size_t j = 0; j < C; ++j) m[i][j] += a[i][k] * b[k][j];
    return m;
}

template <std::size_t R, std::size_t C>
[[nodiscard]] Matrix<C, R> transposed(const Matrix<R, C>& a) {
    Matrix<C, R> m{};
    for (std::size_t i = 0; i < R; ++i)
        for (std::size_t j = 0; j < C; ++j) m[j][i] = a[i][j];
    return m;
}

template <std::size_t R, std::size_t C>
[[nodiscard]] Matrix<R, C> sum(const Matrix<R, C>& a, const Matrix<R, C>& b, long double factor = 1.0L) {
    Matrix<R, C> m = a;
    for (std::size_t i = 0; i < R; ++i)
        for (std::size_t j = 0; j < C; ++j) m[i][j] += factor * b[i][j];
    return m;
}

// a B a^T.
template <std::size_t R, std::size_t C>
[[nodiscard]] Matrix<R> sandwich(const Matrix<R, C>& a, const Matrix<C>& b) {
    return product(product(a, b), transposed(a));
}

// a b^T.
template <std::size_t N, class A, class B>
[[nodiscard]] Matrix<N> outer(const std::array<A, N>& a, const std::array<B, N>& b) {
    Matrix<N> m{};
    for (std::size_t i = 0; i < N; ++i)
        for (std::size_t j = 0; j < N; ++j)
            m[i][j] = static_cast<long double>(a[i]) * static_cast<long double>(b[j]);
    return m;
}

template <class Real, std::size_t N>
[[nodiscard]] Matrix<N> covariance_of(const core::UdFilter<Real, N>& filter) {
    Matrix<N> p{};
    for (std::size_t i = 0; i < N; ++i)
        for (std::size_t j = 0; j < N; ++j) p[i][j] = filter.covariance(i, j);
    return p;
}

// Largest difference of two covariances, each entry over the standard deviations of its two states.
template <std::size_t N>
[[nodiscard]] double worst_difference(const Matrix<N>& found, const Matrix<N>& expected) {
    long double worst = 0.0L;
    for (std::size_t i = 0; i < N; ++i) {
        for (std::size_t j = 0; j < N; ++j) {
            const long double scale = std::sqrt(expected[i][i] * expected[j][j]);
            const long double off = std::abs(found[i][j] - expected[i][j]);
            // A state that is known exactly has no scale of its own: roundings of nothing are nothing.
            const long double relative = off / std::max(scale, 1e-18L);
            if (!(relative <= worst)) worst = relative;  // not-a-number counts as worst
        }
    }
    return static_cast<double>(worst);
}

}  // namespace holdfast::testing
