// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <zmq.hpp>

#include "tests/link/link_fixture.hpp"

namespace holdfast::link {
namespace {

using namespace holdfast::testing;

constexpr std::uint64_t kA = 0xA;
constexpr std::uint64_t kB = 0xB;

TEST_CASE("a stream arrives whole, in order, with what is known of it") {
    Link wire;
    const StreamInfo info{.ride_height_names = {"front", "rear"}, .channels = 1, .origin = "test"};
    for (std::uint64_t i = 0; i < 300; ++i) wire.send(kA, i, info);
    wire.send_end({.id = {kA, 300}, .rows = 600, .complete = true, .reason = {}});

    std::string expected = "S ";
    for (int i = 0; i < 300; ++i) expected += std::to_string(i) + " ";
    CHECK(arrivals_until_end(wire.in) == expected + "E");
    CHECK(wire.in.info().ride_height_names == info.ride_height_names);
    CHECK(wire.in.info().origin == "test");
    CHECK(wire.in.end().complete);
    const LinkCounters counters = wire.in.counters();
    CHECK(counters.messages == 300);
    CHECK(counters.frames == 600);
    CHECK(counters.streams == 1);
    CHECK(counters.connects == 1);
    CHECK(counters.lost_messages + counters.lost_frames + counters.missed_before_joining + counters.repeated +
              counters.out_of_order + counters.damaged + counters.disconnects ==
          0);
}

TEST_CASE("who joins late reads on from there: nothing is called lost, what was missed is counted") {
    Link wire;
    wire.send(kA, 40);
    wire.send(kA, 41);
    wire.send_end({.id = {kA, 42}, .rows = 84, .complete = true, .reason = {}});
    CHECK(arrivals_until_end(wire.in) == "S 40 41 E");
    CHECK(wire.in.counters().missed_before_joining == 80);
    CHECK(wire.in.counters().lost_messages == 0);
    CHECK(wire.in.counters().lost_frames == 0);
}

TEST_CASE("lost, repeated and late messages are counted and left out") {
    Link wire;
    for (const std::uint64_t i : {0U, 1U, 1U, 5U, 3U, 0U, 6U}) wire.send(kA, i);
    wire.send_end({.id = {kA, 7}, .rows = 14, .complete = true, .reason = {}});
    CHECK(arrivals_until_end(wire.in) == "S 0 1 5 6 E");
    const LinkCounters counters = wire.in.counters();
    CHECK(counters.lost_messages == 3);
    CHECK(counters.lost_frames == 6);
    CHECK(counters.repeated == 2);
    CHECK(counters.out_of_order == 1);
}

TEST_CASE("what is lost before the end is noticed by the end") {
    Link wire;
    wire.send(kA, 0);
    wire.send_end({.id = {kA, 3}, .rows = 6, .complete = false, .reason = "the log broke off"});
    CHECK(arrivals_until_end(wire.in) == "S 0 E");
    CHECK(wire.in.counters().lost_messages == 2);
    CHECK(wire.in.counters().lost_frames == 4);
    CHECK_FALSE(wire.in.end().complete);
    CHECK(wire.in.end().reason == "the log broke off");
}

TEST_CASE("the end is told once however often it is sent, also of a stream that was not seen") {
    Link wire;
    wire.send(kA, 0);
    for (int i = 0; i < 3; ++i) wire.send_end({.id = {kA, 1}, .rows = 2, .complete = true, .reason = {}});
    for (int i = 0; i < 3; ++i) wire.send_end({.id = {kB, 9}, .rows = 18, .complete = true, .reason = {}});
    wire.send(3, 0);
    wire.send_end({.id = {3, 1}, .rows = 2, .complete = true, .reason = {}});
    CHECK(arrivals_until_end(wire.in) == "S 0 E");
    CHECK(arrivals_until_end(wire.in) == "E");
    CHECK(arrivals_until_end(wire.in) == "S 0 E");
    CHECK(wire.in.counters().lost_messages == 0);
}

TEST_CASE("a node that starts anew begins a new stream, and the old one does not come back") {
    Link wire;
    const StreamInfo other{.ride_height_names = {"new"}, .channels = 0, .origin = {}};
    wire.send(kA, 7);
    wire.send(kA, 8);
    wire.send(kB, 0, other);
    wire.send(kA, 9);  // a straggler
    wire.send_end({.id = {kA, 10}, .rows = 20, .complete = true, .reason = {}});
    wire.send(kB, 1, other);
    wire.send_end({.id = {kB, 2}, .rows = 4, .complete = true, .reason = {}});
    CHECK(arrivals_until_end(wire.in) == "S 7 8 S 0 1 E");
    CHECK(wire.in.info().ride_height_names == other.ride_height_names);
    CHECK(wire.in.counters().streams == 2);
    CHECK(wire.in.counters().out_of_order == 1);
    CHECK(wire.in.counters().lost_messages == 0);
    CHECK(wire.in.counters().lost_frames == 0);
}

TEST_CASE("damaged messages are counted, explained and passed over") {
    Link wire;
    wire.send(kA, 0);
    wire.out.send(Topic::frames, "no block at all");
    wire.out.send(Topic::end, "\xff");
    wire.send(kA, 1, {.ride_height_names = {"other"}, .channels = 0, .origin = {}});
    wire.send(kA, 1);
    wire.send_end({.id = {kA, 2}, .rows = 4, .complete = true, .reason = {}});
    CHECK(arrivals_until_end(wire.in) == "S 0 1 E");
    CHECK(wire.in.counters().damaged == 3);
    REQUIRE(wire.in.last_damage());
    CHECK_THAT(wire.in.last_damage()->message, Catch::Contains("names of the ride heights changed"));
}

TEST_CASE("a block without frames tells of the stream and brings nothing else") {
    Link wire;
    const StreamInfo info{.ride_height_names = {"front"}, .channels = 0, .origin = {}};
    wire.out.send(Topic::frames, proto::BlockEncoder().encode({kA, 0}, 0, info, {}));
    wire.send_end({.id = {kA, 1}, .rows = 0, .complete = true, .reason = {}});
    CHECK(arrivals_until_end(wire.in) == "S E");
    CHECK(wire.in.info().ride_height_names == std::vector<std::string>{"front"});
    CHECK(wire.in.counters().lost_messages == 0);
}

TEST_CASE("messages of other parts or topics than ours are counted and passed over") {
    zmq::context_t context;
    zmq::socket_t raw(context, zmq::socket_type::xpub);
    raw.bind("tcp://127.0.0.1:*");
    FrameReceiver in = receiver(raw.get(zmq::sockopt::last_endpoint));
    zmq::message_t subscription;
    for (int i = 0; i < 2; ++i) (void)raw.recv(subscription);

    const auto send = [&](const std::vector<std::string>& parts) {
        for (std::size_t i = 0; i < parts.size(); ++i)
            raw.send(zmq::buffer(parts[i]),
                     i + 1 < parts.size() ? zmq::send_flags::sndmore : zmq::send_flags::none);
    };
    send({"frames"});
    send({"frames", block_of_two(kA, 0), "a third part"});
    send({"frames of another kind", block_of_two(kA, 0)});
    send({"frames", block_of_two(kA, 0)});
    send({"end", proto::encode_end({.id = {kA, 1}, .rows = 2, .complete = true, .reason = {}})});
    CHECK(arrivals_until_end(in) == "S 0 E");
    CHECK(in.counters().damaged == 3);
}

TEST_CASE("an endpoint that makes no sense is an error, silence is none") {
    const auto nonsense = FrameReceiver::connect("nonsense");
    REQUIRE_FALSE(nonsense);
    CHECK_THAT(nonsense.error().message, Catch::Contains("nonsense") && Catch::Contains("tcp://"));

    const Publisher out = publisher();
    FrameReceiver in = receiver(out.endpoint());
    CHECK(in.receive(std::chrono::milliseconds{1}).kind == Arrival::Kind::nothing);
}

TEST_CASE("the counters have names for a summary") {
    const auto named = by_name({.messages = 1, .disconnects = 11});
    REQUIRE(named.size() == 11);
    CHECK(named.front() == std::pair<std::string, std::uint64_t>{"messages", 1});
    CHECK(named.back() == std::pair<std::string, std::uint64_t>{"disconnects", 11});
}

}  // namespace
}  // namespace holdfast::link
