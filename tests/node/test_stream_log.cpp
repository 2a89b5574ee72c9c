// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <future>

#include "estimator/session/log_source.hpp"
#include "firmware_host/node/play.hpp"
#include "firmware_host/node/uplink.hpp"
#include "proto/vocabulary/exit_status.hpp"
#include "tests/link/link_fixture.hpp"
#include "tests/proto/random_frames.hpp"

namespace holdfast::node {
namespace {

using namespace holdfast::testing;

class FakeLog final : public session::LogSource {
  public:
    FakeLog(StreamInfo info, std::vector<Frame> frames, std::optional<session::Error> breaks = std::nullopt)
        : info_(std::move(info)), frames_(std::move(frames)), breaks_(std::move(breaks)) {}

    const StreamInfo& info() const override { return info_; }
    bool next(Frame& frame) override {
        if (next_ == frames_.size()) {
            error_ = breaks_;
            return false;
        }
        frame = frames_[next_++];
        return true;
    }
    const std::optional<session::Error>& error() const override { return error_; }
    const std::vector<std::string>& left_out() const override { return left_out_; }
    double progress() const override { return 0.0; }

  private:
    StreamInfo info_;
    std::vector<Frame> frames_;
    std::size_t next_ = 0;
    std::optional<session::Error> breaks_;
    std::optional<session::Error> error_;
    std::vector<std::string> left_out_;
};

struct Received {
    int status = -1;
    StreamInfo info;
    std::vector<Frame> frames;
    proto::End end;
    link::LinkCounters counters;
};

// The node in a thread, the receiver here, a real socket between them.
Received stream(FakeLog log, const PlayOptions& options) {
    Uplink uplink(publisher(options.link.when_full), log.info());
    link::FrameReceiver in = receiver(uplink.endpoint());
    auto status = std::async(std::launch::async, [&] { return stream_log(log, uplink, options); });
    Received got;
    for (link::Arrival arrival; arrival.kind != link::Arrival::Kind::end;) {
        arrival = in.receive(kLongEnough);
        if (arrival.kind == link::Arrival::Kind::nothing) throw std::runtime_error("the stream has no end");
        got.frames.insert(got.frames.end(), arrival.frames.begin(), arrival.frames.end());
    }
    got.status = status.get();
    got.info = in.info();
    got.end = in.end();
    got.counters = in.counters();
    return got;
}

TEST_CASE("a log that is played arrives whole and bit by bit, at any pace") {
    const double pace = GENERATE(0.0, 500.0);
    const std::uint32_t seed = 301;
    INFO("pace " << pace << ", seed " << seed);
    const StreamInfo info = named_stream(3);
    const std::vector<Frame> frames = random_frames(20'000, info, seed);  // some 50 s
    PlayOptions options;
    options.link.pace = pace;
    const Received got = stream(FakeLog(info, frames), options);
    CHECK(got.status == kDone);
    CHECK(same_bits(got.frames, frames));
    CHECK(got.info.ride_height_names == info.ride_height_names);
    CHECK(got.info.channels == info.channels);
    CHECK(got.end.complete);
    CHECK(got.end.rows == frames.size());
    CHECK(got.counters.lost_messages == 0);
    CHECK(got.counters.missed_before_joining == 0);
}

TEST_CASE("of a log, only what lies between start and end is played, in its own time") {
    std::vector<Frame> frames;
    for (std::int64_t i = 0; i < 100; ++i) frames.push_back(frame_at(i * 100'000'000));
    PlayOptions options;
    options.link.pace = 0;
    options.start_s = 2.0;
    options.end_s = 5.0;
    const Received got = stream(FakeLog({}, frames), options);
    CHECK(got.status == kDone);
    CHECK(same_bits(got.frames, {frames.begin() + 20, frames.begin() + 50}));
    CHECK(got.end.complete);
    CHECK(got.counters.missed_before_joining == 0);
}

TEST_CASE("of a log that breaks off, what was read well arrives, and the end says why it is not whole") {
    const std::vector<Frame> frames{frame_at(0), frame_at(1)};
    PlayOptions options;
    const session::Error error{.file = "log.csv", .line = 4, .message = "the file is cut"};
    const Received got = stream(FakeLog({}, frames, error), options);
    CHECK(got.status == kIncomplete);
    CHECK(same_bits(got.frames, frames));
    CHECK_FALSE(got.end.complete);
    CHECK(got.end.reason == session::to_string(error));
}

TEST_CASE("a log without frames has an end all the same") {
    const Received got = stream(FakeLog({}, {}), {});
    CHECK(got.status == kDone);
    CHECK(got.end.complete);
    CHECK(got.end.rows == 0);
}

TEST_CASE("with nobody to wait for, a log is played to nobody") {
    FakeLog log({}, {frame_at(0)});
    Uplink uplink(publisher(), log.info());
    PlayOptions options;
    options.link.wait = 0;
    CHECK(stream_log(log, uplink, options) == kDone);
    CHECK(uplink.rows() == 1);
}

}  // namespace
}  // namespace holdfast::node
