// SPDX-License-Identifier: MIT
#include "firmware_host/node/play.hpp"

#include <memory>
#include <utility>

#include "estimator/session/bind.hpp"
#include "estimator/session/car_file.hpp"
#include "estimator/session/interrupt.hpp"
#include "estimator/session/log_source.hpp"
#include "firmware_host/node/report.hpp"
#include "firmware_host/node/sending.hpp"
#include "firmware_host/node/uplink.hpp"
#include "proto/vocabulary/exit_status.hpp"

namespace holdfast::node {
namespace {

void tell(const session::Errors& errors) {
    for (const session::Error& error : errors) tell_error(session::to_string(error));
}

// The log, or nullptr: why has been told.
std::unique_ptr<session::LogSource> open(const PlayOptions& options) {
    auto log = session::open_log(options.log, options.channels, false);
    if (!log) {
        tell(log.errors());
        return nullptr;
    }
    return std::move(*log);
}

bool suits_car(const StreamInfo& stream, const std::string& car) {
    if (car.empty()) return true;
    const auto car_file = session::read_car_file(car);
    const session::Errors errors = car_file ? session::check_against(*car_file, stream) : car_file.errors();
    tell(errors);
    return errors.empty();
}

}  // namespace

int stream_log(session::LogSource& log, Uplink& uplink, const PlayOptions& options) {
    const auto next = [&](Frame& frame) {
        while (log.next(frame))
            if (frame.time_s() >= options.start_s) return frame.time_s() < options.end_s;
        return false;
    };
    bool stalled = false;
    const auto send = [&](std::span<const Frame> frames) {
        const link::SendResult result = uplink.send(frames);
        stalled = result == link::SendResult::stalled;
        return !stalled && result != link::SendResult::interrupted;
    };
    SteadyTime time;
    Pacer pacer(options.link.pace, time);
    if (uplink.wait_for_subscribers(options.link.wait))
        send_all(next, batch_rule(options.link.pace, options.link.batch_ms), pacer, send);

    std::string reason;
    if (log.error()) reason = session::to_string(*log.error());
    if (session::interrupted()) reason = session::interrupt_reason();
    if (stalled) reason = "a subscriber took nothing for too long";
    uplink.end(reason.empty(), reason);
    if (!reason.empty()) tell_error(reason);
    tell_note(sending_report(uplink, pacer));
    return stalled ? kFailed : reason.empty() ? kDone : kIncomplete;
}

int play(const PlayOptions& options) {
    const auto log = open(options);
    if (log == nullptr || !suits_car(log->info(), options.car)) return kFailed;
    auto publisher =
        link::Publisher::bind({.endpoint = options.link.bind, .when_full = options.link.when_full});
    if (!publisher) {
        tell_error(publisher.error().message);
        return kFailed;
    }
    session::note_interrupts();
    Uplink uplink(std::move(*publisher), log->info());
    tell_note("streaming " + options.log + " on " + uplink.endpoint() + when_it_begins(options.link.wait));
    return stream_log(*log, uplink, options);
}

}  // namespace holdfast::node
