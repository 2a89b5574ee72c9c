// SPDX-License-Identifier: MIT
// Kalman filter of fixed size whose covariance is carried as P = U D U^T, U unit upper triangular, D
// diagonal: D stays non-negative whatever the rounding, so that a variance cannot turn negative. Scaling a
// state scales a column and a row exactly, so states keep their SI units also in 32-bit float. Sources: G. J.
// Bierman, Factorization Methods for Discrete Sequential Estimation, Academic Press 1977 (update, ch. V; bias
// partition, ch. VII); C. L. Thornton, JPL TM 33-798, 1976 (weighted Gram-Schmidt time update); Agee &
// Turner, WSMR TR 38, 1972 (rank-one change).
#pragma once

#include <algorithm>
#include <array>
#include <cstddef>

namespace holdfast::core {

// How a scalar measurement met the prediction.
template <class Real>
struct Innovation {
    Real value = 0;     // measured - predicted
    Real variance = 0;  // of value, measurement noise included
};

template <class Real, std::size_t N>
class UdFilter {
  public:
    using Vector = std::array<Real, N>;

    Vector x{};  // state estimate

    void set_diagonal(const Vector& variances) {
        for (auto& column : u_) column.fill(0);
        for (std::size_t j = 0; j < N; ++j) u_[j][j] = 1;
        d_ = variances;
    }

    // Forget state i: the given variance, correlated with nothing.
    // P has to stay the rest's own: column i of U carries what i shares with the states before it, so their
    // share is given back as rank-one terms before the column is cleared.
    void reset_state(std::size_t i, Real variance) {
        kept_[i] = 0;
        added_[i] = variance;
        Vector shared{};
        for (std::size_t k = 0; k < i; ++k) shared[k] = u_[i][k];
        const Real weight = d_[i];
        for (std::size_t k = 0; k < i; ++k) u_[i][k] = 0;
        d_[i] = variance;
        for (std::size_t j = i + 1; j < N; ++j) u_[j][i] = 0;
        if (weight > 0 && i > 0) add_rank_one(shared, weight, i - 1);
    }

    [[nodiscard]] Real covariance(std::size_t i, std::size_t k) const {
        Real sum = 0;
        for (std::size_t j = (i > k ? i : k); j < N; ++j) sum += u_[j][i] * d_[j] * u_[j][k];
        return sum;
    }
    [[nodiscard]] Real variance(std::size_t i) const { return covariance(i, i); }

    // Variance of the linear form a^T x.
    [[nodiscard]] Real variance_of(const Vector& a) const {
        Real sum = 0;
        for (std::size_t j = 0; j < N; ++j) {
            const Real f = project(a, j);
            sum += d_[j] * f * f;
        }
        return sum;
    }

    // First half of an update with the model  y = h^T x + noise: what innovation variance is to be expected.
    // The projections are kept for apply().
    [[nodiscard]] Real expect(const Vector& h, Real noise_variance) {
        std::size_t end = N;  // most measurements see the first states only
        while (end > 0 && h[end - 1] == 0) --end;
        Real alpha = noise_variance;
        for (std::size_t j = 0; j < N; ++j) {
            f_[j] = project(h, j, end);
            v_[j] = d_[j] * f_[j];
            alpha += v_[j] * f_[j];
        }
        noise_variance_ = noise_variance;
        return alpha;
    }

    // Second half: Bierman's scalar update with the innovation (measured - predicted). The gain stays in
    // gain().
    void apply(Real innovation) {
        Real alpha = noise_variance_;
        for (std::size_t j = 0; j < N; ++j) {
            const Real alpha_before = alpha;
            alpha += v_[j] * f_[j];
            d_[j] *= alpha_before / alpha;
            const Real lambda = -f_[j] / alpha_before;
            Real* column = u_[j].data();
            Real* b = gain_.data();
            const Real v = v_[j];
            for (std::size_t i = 0; i < j; ++i) {
                const Real u = column[i];
                column[i] = u + b[i] * lambda;
                b[i] += v * u;
            }
            b[j] = v;
        }
        const Real scale = 1 / alpha;
        for (std::size_t i = 0; i < N; ++i) {
            gain_[i] *= scale;
            x[i] += gain_[i] * innovation;
        }
    }
    [[nodiscard]] const Vector& gain() const { return gain_; }

    // P += weight a a^T, weight >= 0. a may be as short as its last entry that is not zero; `last` may say so
    // too.
    template <std::size_t Count = N>
    void add_rank_one(std::array<Real, Count> a, Real weight, std::size_t last = Count - 1) {
        for (std::size_t j = last + 1; j-- > 0;) {
            const Real s = a[j];
            const Real d_new = d_[j] + weight * (s * s);
            if (!(d_new > 0)) continue;
            const Real beta = weight * s / d_new;
            weight = weight * d_[j] / d_new;
            d_[j] = d_new;
            Real* column = u_[j].data();
            for (std::size_t i = 0; i < j; ++i) {
                a[i] -= s * column[i];
                column[i] += beta * a[i];
            }
        }
    }
    // State i times a factor (its estimate is the caller's): row i of U scales, so that its column is scaled
    // back and its own diagonal takes the square.
    void scale_state(std::size_t i, Real factor) {
        kept_[i] *= factor;
        added_[i] *= factor * factor;
        for (std::size_t j = i + 1; j < N; ++j) u_[j][i] *= factor;
        for (std::size_t k = 0; k < i; ++k) u_[i][k] /= factor;
        d_[i] *= factor * factor;
    }
    void add_noise(std::size_t i, Real added_variance) {
        added_[i] += added_variance;
        Vector a{};
        a[i] = 1;
        add_rank_one(a, added_variance, i);
    }

    // Time update of the first M states, the rest staying as they are (the bias partition): the caller has
    // already multiplied the first M rows of U by the transition, which leaves the M x M block dense;
    // `transition_rows` is that block, row by row, and `noise` its noise input, M x Q, with variances q. The
    // columns beyond M are the caller's, through column().
    template <std::size_t M, std::size_t Q>
    void triangularize(std::array<std::array<Real, M + Q>, M>& rows, const std::array<Real, Q>& q) {
        std::array<Real, M + Q> weight{};
        for (std::size_t k = 0; k < M; ++k) weight[k] = d_[k];
        for (std::size_t k = 0; k < Q; ++k) weight[M + k] = q[k];
        std::array<Real, M + Q> weighted{};
        for (std::size_t j = M; j-- > 0;) {
            Real norm = 0;
            for (std::size_t k = 0; k < M + Q; ++k) {
                weighted[k] = rows[j][k] * weight[k];
                norm += weighted[k] * rows[j][k];
            }
            d_[j] = norm;
            u_[j][j] = 1;
            const Real inverse = norm > 0 ? 1 / norm : 0;
            for (std::size_t i = 0; i < j; ++i) {
                Real dot = 0;
                for (std::size_t k = 0; k < M + Q; ++k) dot += rows[i][k] * weighted[k];
                const Real u = dot * inverse;
                u_[j][i] = u;
                for (std::size_t k = 0; k < M + Q; ++k) rows[i][k] -= u * rows[j][k];
            }
        }
    }

    // What became of each state by itself since forget_changes(), measurements aside: it was multiplied by
    // kept() and given the variance added(). For whoever smooths the slow states backwards.
    [[nodiscard]] Real kept(std::size_t i) const { return kept_[i]; }
    [[nodiscard]] Real added(std::size_t i) const { return added_[i]; }
    void forget_changes() {
        kept_.fill(1);
        added_.fill(0);
    }

    // Column j of U (entries 0..j); for time updates and for conditioning on the last state.
    [[nodiscard]] std::array<Real, N>& column(std::size_t j) { return u_[j]; }
    [[nodiscard]] const std::array<Real, N>& column(std::size_t j) const { return u_[j]; }
    [[nodiscard]] Real& diagonal(std::size_t j) { return d_[j]; }
    [[nodiscard]] Real diagonal(std::size_t j) const { return d_[j]; }

  private:
    [[nodiscard]] static constexpr Vector ones() {
        Vector v{};
        v.fill(1);
        return v;
    }
    // Entry j of U^T h; h is zero from `end` on.
    [[nodiscard]] Real project(const Vector& h, std::size_t j, std::size_t end = N) const {
        const Real* column = u_[j].data();
        Real f = h[j];
        for (std::size_t i = 0; i < std::min(j, end); ++i) f += column[i] * h[i];
        return f;
    }

    std::array<Vector, N> u_{};  // by columns
    Vector d_{};
    Vector f_{};
    Vector v_{};
    Vector gain_{};
    Vector kept_ = ones();
    Vector added_{};
    Real noise_variance_ = 1;
};

}  // namespace holdfast::core
