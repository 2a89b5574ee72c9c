// SPDX-License-Identifier: MIT
#include <chrono>
#include <cstdint>
#include <filesystem>
#include <iostream>
#include <memory>
#include <optional>
#include <span>
#include <string>
#include <utility>

#include "estimator/commands/commands.hpp"
#include "estimator/commands/silence.hpp"
#include "estimator/commands/stage.hpp"
#include "estimator/commands/wire_sink.hpp"
#include "estimator/link/frame_receiver.hpp"
#include "estimator/link/publisher.hpp"
#include "estimator/outputs/text.hpp"
#include "estimator/session/interrupt.hpp"
#include "proto/vocabulary/exit_status.hpp"

namespace holdfast::commands {
namespace {

using link::Arrival;

// How often Ctrl-C and silence are looked at while nothing comes.
constexpr std::chrono::milliseconds kLook{100};
constexpr std::chrono::milliseconds kLinkPeriod{250};  // of the link's state on the page

// A stage for each stream of the node. The first stream's results lie in the folder that was asked for; those
// after a restart of the node in stream-2, stream-3, ... within it.
class Listening {
  public:
    Listening(const LiveOptions& options, session::CarFile car_file, link::FrameReceiver receiver,
              std::optional<link::Publisher> publisher, wall::Wall& wall)
        : options_(options),
          car_file_(std::move(car_file)),
          receiver_(std::move(receiver)),
          publisher_(std::move(publisher)),
          wall_(wall) {}

    int until_the_end() {
        while (!session::interrupted()) {
            const Arrival arrival = receiver_.receive(kLook);
            watch_silence(arrival.kind);
            attend_page();
            if (arrival.kind == Arrival::Kind::stream && !begin_stream()) return kFailed;
            if (arrival.kind == Arrival::Kind::frames) take(arrival.frames);
            if (arrival.kind == Arrival::Kind::end) {
                const proto::End& end = receiver_.end();
                return leave(end.complete, "the node's own input broke off: " + end.reason);
            }
        }
        return leave(false, session::interrupt_reason());
    }

  private:
    bool begin_stream() {
        if (stage_) {
            stage_->remark("the node has started anew");
            finish(false, "the node started anew before it had said that its stream was over");
        }
        const link::LinkCounters so_far = receiver_.counters();
        missed_ = so_far.missed_before_joining - std::exchange(missed_in_all_, so_far.missed_before_joining);
        lost_earlier_ = so_far.lost_frames;
        const auto bound = bind(car_file_, receiver_.info());
        if (!bound) return false;
        std::filesystem::path folder = options_.results.out;
        if (++streams_ > 1) folder /= "stream-" + std::to_string(streams_);
        wire_.reset();
        if (publisher_) wire_.emplace(*publisher_, receiver_.info());
        stage_ = std::make_unique<Stage>(car_file_, *bound, receiver_.info(),
                                         Input{.name = options_.from, .live = true, .stream = streams_},
                                         folder, options_.results, wall_, wire_ ? &*wire_ : nullptr);
        return true;
    }

    void take(std::span<const Frame> frames) {
        for (Frame frame : frames) stage_->step(frame);
        last_time_ns_ = frames.back().time_ns;
    }

    void watch_silence(Arrival::Kind kind) {
        const auto now = Silence::Clock::now();
        if (kind != Arrival::Kind::nothing) {
            if (const auto length = silence_.ends(now); length && stage_)
                stage_->remark("data are back after " + outputs::fixed(length->count(), 1) + " s of silence");
        } else if (silence_.begins(now) && stage_) {
            core::Alarm alarm;
            alarm.kind = core::AlarmKind::data_stale;
            alarm.time_ns = last_time_ns_;
            stage_->raise(alarm);
            stage_->remark("nothing has come for a second; the link is " +
                           std::string(receiver_.connected() ? "up" : "down"));
        }
    }

    void attend_page() {
        if (!stage_ || !wall_.server) return;
        stage_->attend_page();
        const auto now = Silence::Clock::now();
        if (now < next_link_) return;
        next_link_ = now + kLinkPeriod;
        const link::LinkCounters n = receiver_.counters();
        using State = wall::LinkStatus::State;
        stage_->show_link({.state = silence_.lasts() ? State::silent : State::up,
                           .messages = n.messages,
                           .lost = n.lost_messages,
                           .repeated = n.repeated,
                           .out_of_order = n.out_of_order,
                           .damaged = n.damaged,
                           .restarts = streams_ - 1});
    }

    // Ends the stage. What the link has lost makes its input incomplete, whatever the node says.
    void finish(bool complete, std::string reason) {
        const link::LinkCounters total = receiver_.counters();
        const std::uint64_t lost = total.lost_frames - lost_earlier_;
        if (complete && missed_ > 0) {
            complete = false;
            reason = std::to_string(missed_) + " frames had been sent before this program listened";
        }
        if (complete && lost > 0) {
            complete = false;
            reason = std::to_string(lost) + " frames were lost on the link";
        }
        all_complete_ = all_complete_ && complete;
        stage_->set_link_counters(link::by_name(total));
        stage_->finish(complete, complete ? std::string{} : reason);
        stage_.reset();
    }

    int leave(bool complete, const std::string& reason) {
        if (!stage_) {
            std::cerr << "error: no samples came from " << options_.from << '\n';
            return kFailed;
        }
        finish(complete, reason);
        return all_complete_ ? kDone : kIncomplete;
    }

    const LiveOptions& options_;
    session::CarFile car_file_;
    link::FrameReceiver receiver_;
    std::optional<link::Publisher> publisher_;
    wall::Wall& wall_;
    std::optional<WireSink> wire_;  // of the stage
    std::unique_ptr<Stage> stage_;  // of the newest stream
    std::uint32_t streams_ = 0;
    std::int64_t last_time_ns_ = 0;
    Silence::Clock::time_point next_link_{};
    Silence silence_{Silence::Clock::now()};
    std::uint64_t missed_ = 0;         // frames of the newest stream that were sent before we listened
    std::uint64_t missed_in_all_ = 0;  // the same of all streams
    std::uint64_t lost_earlier_ = 0;   // frames lost in the streams before
    bool all_complete_ = true;
};

}  // namespace

int live(const LiveOptions& options) {
    auto car_file = read_car(options.results.car);
    if (!car_file) return kFailed;
    auto receiver = link::FrameReceiver::connect(options.from);
    if (!receiver) {
        std::cerr << "error: " << proto::to_string(receiver.error()) << '\n';
        return kFailed;
    }
    std::optional<link::Publisher> publisher;
    if (!options.publish.empty()) {
        auto bound = link::Publisher::bind({.endpoint = options.publish});
        if (!bound) {
            std::cerr << "error: " << proto::to_string(bound.error()) << '\n';
            return kFailed;
        }
        publisher = std::move(*bound);
        std::cerr << "publishing on " << publisher->endpoint() << '\n';
    }
    wall::Wall wall;
    open_page(wall, options.results);
    std::cerr << "listening to " << options.from << '\n';
    session::note_interrupts();
    return Listening(options, std::move(*car_file), std::move(*receiver), std::move(publisher), wall)
        .until_the_end();
}

}  // namespace holdfast::commands
