// SPDX-License-Identifier: MIT
// What only a link can do: silence, a node that starts anew, listeners to the results. The node is played by
// the test.
#include <algorithm>
#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>

#include "estimator/link/publisher.hpp"
#include "estimator/link/subscriber.hpp"
#include "estimator/session/log_source.hpp"
#include "proto/codec.hpp"
#include "proto/result_codec.hpp"
#include "tests/end_to_end/logs.hpp"
#include "tests/end_to_end/process.hpp"

using namespace holdfast;
using namespace holdfast::testing;
using Catch::Contains;

namespace {

constexpr std::chrono::milliseconds kPatience{30'000};
constexpr std::size_t kRowsPerBlock = 100;

// Sends pieces of the bundled outing, each as a stream of its own.
class TestNode {
  public:
    TestNode() : publisher_(bound()) {}

    [[nodiscard]] const std::string& endpoint() const { return publisher_.endpoint(); }

    void wait_for_listener() {
        REQUIRE(publisher_.wait_for_subscribers(link::Topic::frames, 1, kPatience));
        REQUIRE(publisher_.wait_for_subscribers(link::Topic::end, 1, kPatience));
    }

    // The outing's first seconds, without an end.
    void begin_stream(double seconds) {
        auto log = session::open_log(demo_log(), {});
        REQUIRE(log);
        id_ = {.stream_id = proto::draw_stream_id(), .sequence = 0};
        rows_ = 0;
        std::vector<Frame> frames;
        Frame frame;
        bool more = true;
        while (more) {
            more = (*log)->next(frame) && frame.time_s() < seconds;
            if (more) frames.push_back(frame);
            if (frames.size() == kRowsPerBlock || (!more && !frames.empty())) send((*log)->info(), frames);
        }
    }

    void end_stream() {
        publisher_.send(link::Topic::end,
                        proto::encode_end({.id = id_, .rows = rows_, .complete = true, .reason = {}}));
    }

  private:
    static link::Publisher bound() {
        auto publisher =
            link::Publisher::bind({.endpoint = "tcp://127.0.0.1:*", .when_full = link::WhenFull::wait});
        REQUIRE(publisher);
        return std::move(*publisher);
    }

    void send(const StreamInfo& info, std::vector<Frame>& frames) {
        REQUIRE(publisher_.send(link::Topic::frames, encoder_.encode(id_, rows_, info, frames)) ==
                link::SendResult::sent);
        ++id_.sequence;
        rows_ += frames.size();
        frames.clear();
    }

    link::Publisher publisher_;
    proto::BlockEncoder encoder_;
    proto::MessageId id_;
    std::uint64_t rows_ = 0;
};

std::size_t rows(const std::string& csv) {
    return static_cast<std::size_t>(std::count(csv.begin(), csv.end(), '\n')) - 1;
}

}  // namespace

TEST_CASE("a node that starts anew gets a folder of its own, and the results until then stay") {
    const TempFolder folder;
    TestNode node;
    Process live("holdfast", live_words(node.endpoint(), folder / "out"), folder.path());
    node.wait_for_listener();
    node.begin_stream(10.0);
    node.begin_stream(5.0);
    node.end_stream();
    REQUIRE(live.wait() == 3);

    const Completeness first = completeness(folder / "out");
    CHECK_FALSE(first.complete);
    CHECK_THAT(first.reason, Contains("started anew"));
    CHECK(completeness(folder / "out/stream-2").complete);
    CHECK(rows(read_file(folder / "out/estimates.csv")) == 500);
    CHECK(rows(read_file(folder / "out/stream-2/estimates.csv")) == 250);
    CHECK_THAT(live.err(), Contains("the node has started anew"));
}

TEST_CASE("silence raises the alarm of stale data by the receiver's clock, and is over when data are back") {
    const TempFolder folder;
    TestNode node;
    Process live("holdfast", live_words(node.endpoint(), folder / "out"), folder.path());
    node.wait_for_listener();
    node.begin_stream(5.0);
    REQUIRE(live.says("data stale"));
    CHECK_FALSE(live.says("data are back", std::chrono::seconds(0)));
    node.end_stream();
    REQUIRE(live.wait() == 0);
    CHECK_THAT(live.err(), Contains("data are back"));
    const auto alarms = nlohmann::json::parse(read_file(folder / "out/summary.json")).at("alarms");
    CHECK(alarms.at("data_stale") == 1);
}

TEST_CASE("a listener to the results hears every closing that is written") {
    const TempFolder folder;
    TestNode node;
    std::vector<std::string> words = live_words(node.endpoint(), folder / "out");
    words.insert(words.end(), {"--publish", "tcp://127.0.0.1:*"});
    Process live("holdfast", words, folder.path());
    REQUIRE(live.says("publishing on tcp://127.0.0.1:"));
    std::string endpoint = live.err().substr(live.err().find("tcp://"));
    endpoint = endpoint.substr(0, endpoint.find('\n'));
    auto listener = link::Subscriber::connect(endpoint, {link::Topic::closure, link::Topic::estimate});
    REQUIRE(listener);
    node.wait_for_listener();

    // Short streams until the listener has been heard of: a subscription takes its time.
    while (!listener->receive(std::chrono::milliseconds{50})) node.begin_stream(0.1);
    node.begin_stream(70.0);
    node.end_stream();

    std::vector<std::uint32_t> closings;
    while (const auto message = listener->receive(std::chrono::milliseconds{2000})) {
        if (message->topic != link::Topic::closure) continue;
        const auto closing = proto::decode_closure(message->bytes);
        REQUIRE(closing);
        closings.push_back(closing->closure.number);
    }
    REQUIRE(live.wait() == 3);  // the short streams had no end
    std::size_t streams = 1;
    while (std::filesystem::exists(folder / ("out/stream-" + std::to_string(streams + 1)))) ++streams;
    REQUIRE(streams > 1);
    const std::size_t written = completeness(folder / ("out/stream-" + std::to_string(streams))).closings;
    CHECK(written > 0);
    CHECK(closings.size() == written);
}
