// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <optional>

#include "tests/link/link_fixture.hpp"

namespace holdfast::link {
namespace {

using namespace holdfast::testing;

TEST_CASE("a receiver that is there before the node, and stays when it starts anew, misses nothing") {
    std::optional<Publisher> out = publisher();
    const std::string endpoint = out->endpoint();
    out.reset();
    FrameReceiver in = receiver(endpoint);
    CHECK(in.receive(std::chrono::milliseconds{1}).kind == Arrival::Kind::nothing);
    for (const std::uint64_t stream_id : {1U, 2U, 3U}) {
        out = publisher(WhenFull::wait, endpoint);
        // The receiver goes on listening meanwhile: that is when a socket says again what it has subscribed
        // to.
        for (int i = 0; i < 20'000 && out->subscribers(Topic::end) == 0; ++i)
            REQUIRE(in.receive(std::chrono::milliseconds{1}).kind == Arrival::Kind::nothing);
        REQUIRE(out->subscribers(Topic::frames) == 1);
        out->send(Topic::frames, block_of_two(stream_id, 0));
        out->send(Topic::frames, block_of_two(stream_id, 1));
        out->send(Topic::end,
                  proto::encode_end({.id = {stream_id, 2}, .rows = 4, .complete = true, .reason = {}}));
        out.reset();
        CHECK(arrivals_until_end(in) == "S 0 1 E");
    }
    CHECK(in.counters().streams == 3);
    CHECK(in.counters().connects == 3);
    CHECK(in.counters().lost_messages == 0);
    CHECK(in.counters().out_of_order == 0);
}

TEST_CASE("an oversize message is refused with its connection; the link comes back by itself") {
    Link wire;
    wire.send(7, 0);
    REQUIRE(wire.in.receive(kLongEnough).kind == Arrival::Kind::stream);
    REQUIRE(wire.in.receive(kLongEnough).kind == Arrival::Kind::frames);
    wire.out.send(Topic::frames, std::string(kMaxWireBytes + 1, 'x'));

    // Sent again and again until it comes through: what is sent while there is no connection is gone.
    std::uint64_t sequence = 1;
    Arrival arrival;
    for (; sequence < 2000 && arrival.kind == Arrival::Kind::nothing; ++sequence) {
        wire.send(7, sequence);
        arrival = wire.in.receive(std::chrono::milliseconds{10});
    }
    REQUIRE(arrival.kind == Arrival::Kind::frames);
    const LinkCounters counters = wire.in.counters();
    CHECK(counters.disconnects == 1);
    CHECK(counters.connects == 2);
    CHECK(counters.frames == 4);
    CHECK(counters.lost_frames == 2 * counters.lost_messages);
    CHECK(counters.lost_messages > 0);
}

}  // namespace
}  // namespace holdfast::link
