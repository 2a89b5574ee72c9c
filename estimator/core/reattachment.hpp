// SPDX-License-Identifier: MIT
// How the flow may come back after a closing: the share of the flap's downforce that is back, as a function
// of the time since reattachment began, for one of three shapes and a time constant.
//   first_order       s = 1 - e^(-u)                                       u = time / tau [shape-first]
//   separation_point  s = ((1 + sqrt(x))^2 - 1) / 3,  x = 1 - e^(-u) [shape-separation] slow_tail         s =
//   1 - (1 - k) e^(-u) - k e^(-u/r),  k = 0.2, r = 4                         [shape-tail]
// Sources: first-order fits, Raibaudo et al., Flow Turb. Combust. 2017; separation point, Goman & Khrabrov,
// J. Aircraft 1994, lift ((1 + sqrt x)/2)^2, here less its detached part and scaled to 0..1; a slow tail as
// circulation adds (Wagner).
#pragma once

#include <array>
#include <cmath>
#include <cstddef>
#include <cstdint>

namespace holdfast::core {

enum class Shape : std::uint8_t { first_order, separation_point, slow_tail };
inline constexpr std::size_t kShapeCount = 3;
inline constexpr double kTailShare = 0.2;
inline constexpr double kTailRatio = 4.0;

// Share that is back; decay = e^(-u), tail_decay = e^(-u/r).
[[nodiscard]] inline double share_back(Shape shape, double decay, double tail_decay) {
    switch (shape) {
        case Shape::first_order:
            return 1.0 - decay;
        case Shape::separation_point: {
            const double root = 1.0 + std::sqrt(1.0 - decay);
            return (root * root - 1.0) / 3.0;
        }
        case Shape::slow_tail:
            return 1.0 - (1.0 - kTailShare) * decay - kTailShare * tail_decay;
    }
    return 0.0;
}

[[nodiscard]] inline double share_back_at(Shape shape, double u) {
    return u <= 0.0 ? 0.0 : share_back(shape, std::exp(-u), std::exp(-u / kTailRatio));
}

// u at which 95 % is back; share_back_at inverted (bisection, once).
[[nodiscard]] inline double time_to_95(Shape shape) {
    double low = 0.0;
    double high = 40.0;
    for (int i = 0; i < 60; ++i) {
        const double middle = 0.5 * (low + high);
        (share_back_at(shape, middle) < 0.95 ? low : high) = middle;
    }
    return 0.5 * (low + high);
}

}  // namespace holdfast::core
