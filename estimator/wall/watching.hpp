// SPDX-License-Identifier: MIT
// One viewer's WebSocket; included by server.cpp alone (hall.hpp says why).
#pragma once

#include <algorithm>
#include <memory>
#include <string>
#include <utility>

#include "estimator/wall/hall.hpp"
#include "estimator/wall/messages.hpp"

namespace holdfast::wall {

using Request = http::request<http::empty_body>;

// At most one write is under way; when it is done, the audience says what comes next.
class Watching : public std::enable_shared_from_this<Watching> {
  public:
    Watching(Hall& hall, Seat seat, beast::tcp_stream stream)
        : hall_(hall), seat_(std::move(seat)), socket_(std::move(stream)), inward_(kPageMessageBytes) {
        hall_.watching.insert(this);
        hall_.viewers.push_back(&viewer_);
    }
    ~Watching() {
        hall_.watching.erase(this);
        std::erase(hall_.viewers, &viewer_);
    }
    Watching(const Watching&) = delete;
    Watching& operator=(const Watching&) = delete;

    void accept(Request request) {
        request_ = std::move(request);
        beast::get_lowest_layer(socket_).expires_never();  // the WebSocket has limits of its own
        websocket::stream_base::timeout limits{};
        limits.handshake_timeout = hall_.options.request_limit;
        limits.idle_timeout = hall_.options.idle_limit;
        limits.keep_alive_pings = true;
        socket_.set_option(limits);
        socket_.set_option(websocket::stream_base::decorator([](websocket::response_type& response) {
            for (const auto& [name, value] : common_headers()) response.set(view(name), view(value));
        }));
        socket_.read_message_max(kPageMessageBytes);
        socket_.text(true);
        socket_.async_accept(request_, [self = shared_from_this()](error_code error) {
            if (error) return;
            self->open_ = true;
            self->read();
            self->pump();
        });
    }

    void pump() {
        if (!open_ || writing_) return;
        sent_ = hall_.audience.next(viewer_);
        note();
        if (!sent_ && hall_.closing) return say_goodbye();
        if (!sent_) return;
        writing_ = true;
        socket_.async_write(asio::buffer(*sent_), [self = shared_from_this()](error_code error, std::size_t) {
            self->writing_ = false;
            if (error) {
                self->leave();
            } else {
                self->pump();
            }
        });
    }

    void leave() {
        open_ = false;
        beast::get_lowest_layer(socket_).close();
    }

  private:
    static constexpr std::size_t kPageMessageBytes = 256;  // an acknowledgement has thirty

    void say_goodbye() {
        open_ = false;
        socket_.async_close(websocket::close_code::going_away,
                            [self = shared_from_this()](error_code) { self->leave(); });
    }

    void read() {
        socket_.async_read(inward_, [self = shared_from_this()](error_code error, std::size_t) {
            if (error) return self->leave();
            const std::string text = beast::buffers_to_string(self->inward_.data());
            self->inward_.consume(self->inward_.size());
            const auto id = self->socket_.got_text() ? acknowledgement(text) : std::nullopt;
            if (!id) return self->leave();  // not our page
            {
                const std::lock_guard lock(self->hall_.acknowledged_mutex);
                // A page can press no faster than a person; more than this is none.
                if (self->hall_.acknowledged.size() < 1024) self->hall_.acknowledged.push_back(*id);
            }
            self->read();
        });
    }

    void note() {
        ServerCounters& counters = hall_.counters;
        counters.most_waiting = std::max<std::uint64_t>(counters.most_waiting, viewer_.waiting());
        counters.resynchronised +=
            viewer_.resynchronised() - std::exchange(noted_resyncs_, viewer_.resynchronised());
        counters.thinned += viewer_.thinned() - std::exchange(noted_thinned_, viewer_.thinned());
    }

    Hall& hall_;
    Seat seat_;
    websocket::stream<beast::tcp_stream> socket_;
    Request request_;
    beast::flat_buffer inward_;
    Viewer viewer_;
    Text sent_;  // under way
    bool open_ = false;
    bool writing_ = false;
    std::uint64_t noted_resyncs_ = 0;
    std::uint64_t noted_thinned_ = 0;
};

}  // namespace holdfast::wall
