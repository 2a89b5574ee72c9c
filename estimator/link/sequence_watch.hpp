// SPDX-License-Identifier: MIT
// Sequence numbers of one stream as they come in: what is new, what has been here, what was lost.
#pragma once

#include <cstdint>

namespace holdfast::link {

enum class SequenceVerdict : std::uint8_t {
    next,          // new, and to be delivered; `lost` numbers before it have not come
    repeated,      // has been here
    out_of_order,  // has not been here, but later ones have: it counts as lost already
};

class SequenceWatch {
  public:
    // The first number may be any: the stream has been joined there.
    [[nodiscard]] SequenceVerdict take(std::uint64_t sequence);
    // Numbers before the last `next` one that have not come.
    [[nodiscard]] std::uint64_t lost() const { return lost_; }
    // Number that has to come next; 0 before the first.
    [[nodiscard]] std::uint64_t expected() const { return expected_; }

  private:
    bool begun_ = false;
    std::uint64_t expected_ = 0;
    std::uint64_t lost_ = 0;
    std::uint64_t seen_ =
        0;  // bit i: number expected_ - 1 - i has been here; older ones are taken as out of order
};

}  // namespace holdfast::link
