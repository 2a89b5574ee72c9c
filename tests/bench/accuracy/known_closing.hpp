// SPDX-License-Identifier: MIT
// A closing of the simulated car as the bound asks for it: everything from the truth.
#pragma once

#include <optional>

#include "firmware_host/car/outing.hpp"
#include "tests/bench/accuracy/bound.hpp"

namespace holdfast::bench {

// Nothing where the flow does not come back to first order, or not wholly.
[[nodiscard]] std::optional<KnownClosing> known_closing(const sim::Outing& outing,
                                                        const sim::TruthClosure& closure);

}  // namespace holdfast::bench
