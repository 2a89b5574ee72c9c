// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>

#include "firmware_host/node/sending.hpp"
#include "tests/node/fake_time.hpp"

namespace holdfast::node {
namespace {

using testing::FakeTime;
using testing::kFakeStart_ns;

// `count` frames, 2.5 ms apart.
FrameSource frames_at_400_hz(int count) {
    return [count, i = std::int64_t{0}](Frame& frame) mutable {
        if (i == count) return false;
        frame.time_ns = 2'500'000 * i++;
        return true;
    };
}

struct Sent {
    FakeTime time;
    std::vector<std::size_t> sizes;
    std::vector<std::int64_t> times_ns;
    std::vector<std::int64_t> clock_ns;

    Sent(int count, double pace, double batch_ms, std::size_t stop_after = 1000) {
        Pacer pacer(pace, time);
        send_all(frames_at_400_hz(count), batch_rule(pace, batch_ms), pacer,
                 [&](std::span<const Frame> frames) {
                     sizes.push_back(frames.size());
                     clock_ns.push_back(time.now_ns() - kFakeStart_ns);
                     for (const Frame& frame : frames) times_ns.push_back(frame.time_ns);
                     return sizes.size() < stop_after;
                 });
    }
    [[nodiscard]] bool all_in_order(int count) const {
        if (times_ns.size() != static_cast<std::size_t>(count)) return false;
        for (std::int64_t i = 0; i < count; ++i)
            if (times_ns[static_cast<std::size_t>(i)] != 2'500'000 * i) return false;
        return true;
    }
};

TEST_CASE("live, every sample has a message of its own, at its own time") {
    const Sent sent(5, 1.0, 2.0);
    CHECK(sent.all_in_order(5));
    CHECK(sent.sizes == std::vector<std::size_t>{1, 1, 1, 1, 1});
    CHECK(sent.clock_ns == std::vector<std::int64_t>{0, 2'500'000, 5'000'000, 7'500'000, 10'000'000});
}

TEST_CASE("samples within the batch's time on the clock travel together, when the last one is due") {
    const Sent sent(7, 1.0, 7.5);
    CHECK(sent.all_in_order(7));
    CHECK(sent.sizes == std::vector<std::size_t>{3, 3, 1});
    // The first batch starts the schedule with its last frame.
    CHECK(sent.clock_ns == std::vector<std::int64_t>{0, 7'500'000, 10'000'000});
}

TEST_CASE("a pace puts more source time into the same time on the clock") {
    const Sent sent(400, 100.0, 2.0);
    CHECK(sent.all_in_order(400));
    CHECK(sent.sizes == std::vector<std::size_t>{80, 80, 80, 80, 80});
}

TEST_CASE("as fast as it goes, messages are large") {
    const Sent sent(1200, 0.0, 2.0);
    CHECK(sent.all_in_order(1200));
    CHECK(sent.sizes == std::vector<std::size_t>{512, 512, 176});
}

TEST_CASE("no frames are no message, and a sink that says stop is not asked again") {
    CHECK(Sent(0, 1.0, 2.0).sizes.empty());
    CHECK(Sent(100, 1.0, 2.0, 3).sizes.size() == 3);
}

}  // namespace
}  // namespace holdfast::node
