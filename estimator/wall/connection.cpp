// SPDX-License-Identifier: MIT
// The one file that sees Boost.Beast.
#include "estimator/wall/connection.hpp"

#include <algorithm>
#include <boost/asio/io_context.hpp>
#include <boost/asio/ip/tcp.hpp>
#include <boost/beast/core.hpp>
#include <boost/beast/http.hpp>
#include <boost/beast/websocket.hpp>
#include <memory>
#include <optional>
#include <string>
#include <string_view>
#include <utility>  // first: Boost 1.74 uses std::exchange without including it, which C++20 brings to light

#include "estimator/wall/messages.hpp"

namespace holdfast::wall {
namespace {

namespace asio = boost::asio;
namespace beast = boost::beast;
namespace http = beast::http;
namespace websocket = beast::websocket;
using tcp = asio::ip::tcp;
using boost::system::error_code;
using Request = http::request<http::empty_body>;
using Response = http::response<http::span_body<const char>>;

std::string_view view(beast::string_view text) {
    return {text.data(), text.size()};
}
beast::string_view view(std::string_view text) {
    return {text.data(), text.size()};
}

// One viewer's WebSocket. At most one write is under way; when it is done, the audience says what comes next.
class Watching : public Pumped, public std::enable_shared_from_this<Watching> {
  public:
    Watching(Hall& hall, Seat seat, beast::tcp_stream stream)
        : hall_(hall), seat_(std::move(seat)), socket_(std::move(stream)), inward_(kPageMessageBytes) {
        hall_.watching.insert(this);
        hall_.viewers.push_back(&viewer_);
    }
    ~Watching() override {
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

    void pump() override {
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

// One HTTP connection: request, answer, and again, until it is left or becomes a WebSocket.
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

}  // namespace

void begin_connection(Hall& hall, asio::io_context& context, int socket, bool ipv6) {
    std::make_shared<Visit>(hall, tcp::socket(context, ipv6 ? tcp::v6() : tcp::v4(), socket))->read();
}

}  // namespace holdfast::wall
