// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <thread>
#include <zmq.hpp>

#include "tests/link/link_fixture.hpp"

namespace holdfast::link {
namespace {

using namespace holdfast::testing;
using std::chrono::milliseconds;

Subscriber subscriber(const std::string& endpoint, const std::vector<Topic>& topics) {
    auto connected = Subscriber::connect(endpoint, topics);
    if (!connected) throw std::runtime_error(connected.error().message);
    return std::move(*connected);
}

// Subscribes to the frames and never reads one.
struct Sleeper {
    zmq::context_t context;
    zmq::socket_t socket{context, zmq::socket_type::sub};
    explicit Sleeper(const std::string& endpoint) {
        socket.set(zmq::sockopt::rcvhwm, 1);
        socket.set(zmq::sockopt::linger, 0);
        socket.set(zmq::sockopt::subscribe, "frames");
        socket.connect(endpoint);
    }
};

// The queues and the system's buffers hold less than this many messages of 16 KiB.
constexpr int kMoreThanFits = 20'000;
const std::string kLargeMessage(16U << 10U, 'x');

TEST_CASE("subscribers are counted by topic as they come and go") {
    Publisher out = publisher();
    CHECK_FALSE(out.wait_for_subscribers(Topic::frames, 1, milliseconds{1}));
    {
        const Subscriber a = subscriber(out.endpoint(), {Topic::frames});
        const Subscriber b = subscriber(out.endpoint(), {Topic::frames, Topic::alarm});
        CHECK(out.wait_for_subscribers(Topic::frames, 2, kLongEnough));
        CHECK(out.wait_for_subscribers(Topic::alarm, 1, kLongEnough));
        CHECK(out.subscribers(Topic::closure) == 0);
    }
    for (int i = 0; i < 20'000 && out.subscribers(Topic::frames) > 0; ++i)
        std::this_thread::sleep_for(milliseconds{1});
    CHECK(out.subscribers(Topic::frames) == 0);
}

TEST_CASE("a subscriber hears its topics and no others") {
    Publisher out = publisher();
    Subscriber in = subscriber(out.endpoint(), {Topic::alarm, Topic::closure});
    REQUIRE(out.wait_for_subscribers(Topic::alarm, 1, kLongEnough));
    REQUIRE(out.wait_for_subscribers(Topic::closure, 1, kLongEnough));
    out.send(Topic::estimate, "1");
    out.send(Topic::alarm, "2");
    out.send(Topic::closure, "");
    const auto first = in.receive(kLongEnough);
    REQUIRE(first);
    CHECK(first->topic == Topic::alarm);
    CHECK(first->bytes == "2");
    const auto second = in.receive(kLongEnough);
    REQUIRE(second);
    CHECK(second->topic == Topic::closure);
    CHECK(second->bytes.empty());
    CHECK(out.counters().sent == 3);
}

TEST_CASE("dropping: a subscriber that reads nothing holds up neither the sender nor the others") {
    Publisher out = publisher(WhenFull::drop);
    const Sleeper sleeper(out.endpoint());
    Subscriber awake = subscriber(out.endpoint(), {Topic::frames});
    REQUIRE(out.wait_for_subscribers(Topic::frames, 2, kLongEnough));
    int sent = 0;
    for (; sent < kMoreThanFits && out.counters().overflows == 0; ++sent) {
        out.send(Topic::frames, kLargeMessage + std::to_string(sent));
        const auto message = awake.receive(kLongEnough);
        REQUIRE(message);
        REQUIRE(message->bytes.substr(kLargeMessage.size()) == std::to_string(sent));
    }
    CHECK(out.counters().overflows == 1);
    CHECK(sent > 4000);  // and it has kept ten seconds for the sleeper
}

TEST_CASE("waiting: a subscriber that is slow loses nothing") {
    constexpr int kMessages = 3000;  // many times the sender's queue
    Publisher out = publisher(WhenFull::wait);
    Subscriber in = subscriber(out.endpoint(), {Topic::frames});
    REQUIRE(out.wait_for_subscribers(Topic::frames, 1, kLongEnough));
    std::thread sender([&] {
        for (int i = 0; i < kMessages; ++i) out.send(Topic::frames, kLargeMessage + std::to_string(i));
    });
    int wrong = 0;
    for (int i = 0; i < kMessages; ++i) {
        const auto message = in.receive(kLongEnough);
        if (!message || message->bytes.substr(kLargeMessage.size()) != std::to_string(i)) ++wrong;
    }
    sender.join();
    CHECK(wrong == 0);
    CHECK(out.counters().sent == kMessages);
    CHECK(out.counters().stalls == 0);
}

TEST_CASE("a subscriber that is far behind when the sender leaves still reads all of it") {
    constexpr int kMessages = 120;                 // more than the subscriber's queue, less than both
    constexpr milliseconds kLongAfterwards{2500};  // probes for a lost peer have come by then
    std::optional<Publisher> out = publisher(WhenFull::wait);
    Subscriber in = subscriber(out->endpoint(), {Topic::frames});
    REQUIRE(out->wait_for_subscribers(Topic::frames, 1, kLongEnough));
    for (int i = 0; i < kMessages; ++i) out->send(Topic::frames, kLargeMessage + std::to_string(i));
    out.reset();
    std::this_thread::sleep_for(kLongAfterwards);
    int read = 0;
    while (read < kMessages) {
        const auto message = in.receive(milliseconds{1000});
        if (!message) break;
        REQUIRE(message->bytes.substr(kLargeMessage.size()) == std::to_string(read));
        ++read;
    }
    CHECK(read == kMessages);
}

TEST_CASE("waiting: a subscriber that takes nothing at all is waited for no longer than asked") {
    Publisher out = publisher(WhenFull::wait, "tcp://127.0.0.1:*", milliseconds{20});
    SendResult result = SendResult::sent;
    {
        const Sleeper sleeper(out.endpoint());
        REQUIRE(out.wait_for_subscribers(Topic::frames, 1, kLongEnough));
        for (int i = 0; i < kMoreThanFits && result == SendResult::sent; ++i)
            result = out.send(Topic::frames, kLargeMessage);
    }
    CHECK(result == SendResult::stalled);
    CHECK(out.counters().stalls == 1);
}

TEST_CASE("an address that cannot be had is an error that names it") {
    const Publisher out = publisher();
    const auto taken = Publisher::bind({.endpoint = out.endpoint()});
    REQUIRE_FALSE(taken);
    CHECK_THAT(taken.error().message, Catch::Contains(out.endpoint()) && Catch::Contains("in use"));
    const auto nonsense = Publisher::bind({.endpoint = "5570"});
    REQUIRE_FALSE(nonsense);
    CHECK_THAT(nonsense.error().message, Catch::Contains("5570") && Catch::Contains("expected"));
}

}  // namespace
}  // namespace holdfast::link
