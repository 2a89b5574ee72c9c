// SPDX-License-Identifier: MIT
// One HTTP connection; included by server.cpp alone (hall.hpp says why).
#pragma once

#include <memory>
#include <optional>
#include <string_view>
#include <utility>

#include "estimator/wall/hall.hpp"
#include "estimator/wall/watching.hpp"

namespace holdfast::wall {

// Request, answer, and again, until it is left or becomes a WebSocket.
class Visit : public std::enable_shared_from_this<Visit> {
  public:
    Visit(Hall& hall, tcp::socket socket) : hall_(hall), seat_(hall), stream_(std::move(socket)) {}

    void read() {
        parser_.emplace();
        parser_->header_limit(kHeaderBytes);
        parser_->body_limit(0);
        stream_.expires_after(hall_.options.request_limit);
        http::async_read(stream_, buffer_, *parser_,
                         [self = shared_from_this()](error_code error, std::size_t) { self->take(error); });
    }

  private:
    using Response = http::response<http::span_body<const char>>;
    static constexpr std::uint32_t kHeaderBytes = 8 * 1024;

    void take(error_code error) {
        if (error == http::error::header_limit) return refuse(431, "The request's header is too long.\n");
        if (error == http::error::body_limit) return refuse(413, "A request here has no body.\n");
        if (error.category() == http::make_error_code(http::error::bad_method).category() &&
            error != http::error::end_of_stream && error != http::error::partial_message)
            return refuse(400, "This is no HTTP request.\n");
        if (error) return close();

        const Request& request = parser_->get();
        const bool upgrade = websocket::is_upgrade(request);
        Answer reply = answer({.method = view(request.method_string()),
                               .target = view(request.target()),
                               .host = view(request[http::field::host]),
                               .origin = view(request[http::field::origin]),
                               .cookie = view(request[http::field::cookie]),
                               .upgrade = upgrade},
                              hall_.house);
        if (reply.upgrade && hall_.watching.size() >= hall_.options.most_viewers)
            reply = {
                .status = 503, .body = "As many viewers as there may be are here already.\n", .more = {}};
        if (reply.upgrade) {
            std::make_shared<Watching>(hall_, std::move(seat_), std::move(stream_))
                ->accept(parser_->release());
            return;
        }
        write(reply, request.method() == http::verb::head, request.keep_alive() && !upgrade);
    }

    void refuse(unsigned status, std::string_view words) {
        write({.status = status, .body = words, .more = {}}, false, false);
    }

    void write(const Answer& reply, bool head, bool keep_alive) {
        response_ = Response{};
        response_.result(reply.status);
        response_.keep_alive(keep_alive);
        const auto set = [&](std::string_view name, std::string_view value) {
            response_.set(view(name), view(value));
        };
        for (const auto& [name, value] : common_headers()) set(name, value);
        for (const auto& [name, value] : reply.more) set(name, value);
        set("Content-Type", reply.type);
        response_.content_length(reply.body.size());
        if (!head) response_.body() = {reply.body.data(), reply.body.size()};
        stream_.expires_after(hall_.options.request_limit);
        http::async_write(stream_, response_,
                          [self = shared_from_this(), keep_alive](error_code error, std::size_t) {
                              if (error || !keep_alive) return self->close();
                              self->read();
                          });
    }

    void close() {
        error_code ignored;
        stream_.socket().shutdown(tcp::socket::shutdown_send, ignored);
    }

    Hall& hall_;
    Seat seat_;
    beast::tcp_stream stream_;
    beast::flat_buffer buffer_{kHeaderBytes + 1024};
    std::optional<http::request_parser<http::empty_body>> parser_;
    Response response_;
};

}  // namespace holdfast::wall
