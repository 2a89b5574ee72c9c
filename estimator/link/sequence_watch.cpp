// SPDX-License-Identifier: MIT
#include "estimator/link/sequence_watch.hpp"

namespace holdfast::link {

SequenceVerdict SequenceWatch::take(std::uint64_t sequence) {
    if (begun_ && sequence < expected_) {
        const std::uint64_t age = expected_ - 1 - sequence;
        return age < 64 && (seen_ >> age & 1U) != 0 ? SequenceVerdict::repeated
                                                    : SequenceVerdict::out_of_order;
    }
    lost_ = begun_ ? sequence - expected_ : 0;
    seen_ = lost_ < 63 ? seen_ << (lost_ + 1) : 0;
    seen_ |= 1U;
    begun_ = true;
    expected_ = sequence + 1;
    return SequenceVerdict::next;
}

}  // namespace holdfast::link
