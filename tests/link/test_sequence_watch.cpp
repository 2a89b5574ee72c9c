// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <limits>

#include "estimator/link/sequence_watch.hpp"

namespace holdfast::link {
namespace {

TEST_CASE("a sequence without gaps has lost nothing, wherever it was joined") {
    const std::uint64_t first = GENERATE(0ULL, 1ULL, 12'345ULL);
    SequenceWatch watch;
    for (std::uint64_t i = first; i < first + 200; ++i) {
        CHECK(watch.take(i) == SequenceVerdict::next);
        CHECK(watch.lost() == 0);
        CHECK(watch.expected() == i + 1);
    }
}

TEST_CASE("a gap counts what is missing in it") {
    SequenceWatch watch;
    CHECK(watch.take(5) == SequenceVerdict::next);
    CHECK(watch.take(9) == SequenceVerdict::next);
    CHECK(watch.lost() == 3);
    CHECK(watch.take(10) == SequenceVerdict::next);
    CHECK(watch.lost() == 0);
}

TEST_CASE("what has been here is repeated, what has not is out of order") {
    SequenceWatch watch;
    for (const std::uint64_t i : {0U, 1U, 4U, 5U}) CHECK(watch.take(i) == SequenceVerdict::next);
    CHECK(watch.take(5) == SequenceVerdict::repeated);
    CHECK(watch.take(4) == SequenceVerdict::repeated);
    CHECK(watch.take(3) == SequenceVerdict::out_of_order);
    CHECK(watch.take(2) == SequenceVerdict::out_of_order);
    CHECK(watch.take(1) == SequenceVerdict::repeated);
    CHECK(watch.take(0) == SequenceVerdict::repeated);
    CHECK(watch.take(6) == SequenceVerdict::next);
    CHECK(watch.lost() == 0);
}

TEST_CASE("gaps wider than the memory of the watch, to the end of all numbers") {
    SequenceWatch watch;
    CHECK(watch.take(0) == SequenceVerdict::next);
    CHECK(watch.take(64) == SequenceVerdict::next);
    CHECK(watch.lost() == 63);
    CHECK(watch.take(64) == SequenceVerdict::repeated);
    CHECK(watch.take(63) == SequenceVerdict::out_of_order);
    CHECK(watch.take(1'000) == SequenceVerdict::next);
    CHECK(watch.take(999) == SequenceVerdict::out_of_order);
    CHECK(watch.take(1'000) == SequenceVerdict::repeated);
    CHECK(watch.take(0) == SequenceVerdict::out_of_order);  // too old to be remembered
    constexpr std::uint64_t last = std::numeric_limits<std::uint64_t>::max() - 1;
    CHECK(watch.take(last) == SequenceVerdict::next);
    CHECK(watch.lost() == last - 1'001);
}

}  // namespace
}  // namespace holdfast::link
