// SPDX-License-Identifier: MIT
// The one file that sees Boost.Beast. Everything runs on one thread: connections, viewers and the audience
// need no locks; only what the poster touches has any.
#include "estimator/wall/server.hpp"

#include <unistd.h>

#include <algorithm>
#include <array>
#include <atomic>
#include <boost/asio/io_context.hpp>
#include <boost/asio/ip/tcp.hpp>
#include <boost/asio/post.hpp>
#include <boost/asio/steady_timer.hpp>
#include <boost/beast/core.hpp>
#include <boost/beast/http.hpp>
#include <boost/beast/websocket.hpp>
#include <mutex>
#include <optional>
#include <set>
#include <stdexcept>
#include <thread>
#include <utility>  // first: Boost 1.74 uses std::exchange without including it, which C++20 brings to light

#include "estimator/wall/answer.hpp"
#include "estimator/wall/audience.hpp"
#include "estimator/wall/inbox.hpp"
#include "estimator/wall/listen_address.hpp"

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

constexpr std::uint32_t kHeaderBytes = 8 * 1024;
constexpr std::size_t kPageMessageBytes = 256;  // an acknowledgement has thirty
constexpr int kSendBuffer = 128 * 1024;         // in the kernel: the staleness that a slow viewer may have
constexpr std::chrono::microseconds kTick{16'667};  // 60 a second
constexpr std::chrono::milliseconds kHeartbeat{500};
constexpr std::chrono::milliseconds kLastWords{1000};  // for viewers to be sent what is left at the end

std::string_view view(beast::string_view text) {
    return {text.data(), text.size()};
}

std::string host_name() {
    std::array<char, 256> name{};
    return ::gethostname(name.data(), name.size() - 1) == 0 ? name.data() : "";
}

// What connections know of their server.
struct Hall {
    House house;
    ServerOptions options;
    Audience audience;
    std::set<class Watching*> watching;
    std::vector<Viewer*> viewers;  // of those
    std::size_t connections = 0;
    ServerCounters counters;
    bool closing = false;  // whoever has been sent everything may go
    std::mutex acknowledged_mutex;
    std::vector<std::uint32_t> acknowledged;
};

// Counts a connection for as long as it lives.
class Seat {
  public:
    explicit Seat(Hall& hall) : hall_(&hall) { ++hall_->connections; }
    Seat(Seat&& other) noexcept : hall_(std::exchange(other.hall_, nullptr)) {}
    Seat(const Seat&) = delete;
    Seat& operator=(const Seat&) = delete;
    Seat& operator=(Seat&&) = delete;
    ~Seat() {
        if (hall_ != nullptr) --hall_->connections;
    }

  private:
    Hall* hall_;
};

// One viewer's WebSocket. At most one write is under way; when it is done, the audience says what comes next.
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
            for (const auto& [name, value] : common_headers())
                response.set(beast::string_view(name.data(), name.size()),
                             beast::string_view(value.data(), value.size()));
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
            response_.set(beast::string_view(name.data(), name.size()),
                          beast::string_view(value.data(), value.size()));
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

class Server::Impl {
  public:
    explicit Impl(const ServerOptions& options) : acceptor_(context_), timer_(context_) {
        const ListenAddress address = listen_address(options.listen);
        hall_.options = options;
        hall_.house.files = options.files;
        const tcp::endpoint bound = listen(options.listen, address);
        port_ = bound.port();
        hall_.house.loopback = bound.address().is_loopback();
        hall_.house.name = bound.address().is_unspecified() ? host_name() : address.host;
        std::string at = bound.address().is_unspecified() ? hall_.house.name : bound.address().to_string();
        if (bound.address().is_v6() && !bound.address().is_unspecified()) at = "[" + at + "]";
        url_ = "http://" + at + ":" + std::to_string(port_) + "/";
        if (!hall_.house.loopback) {
            hall_.house.token = random_token();
            // Cookies know no ports: two walls on one machine must not take each other's.
            hall_.house.cookie_name = "holdfast_wall_" + std::to_string(port_);
            url_ += "?token=" + hall_.house.token;
        }
        accept();
        tick();
        thread_ = std::thread([this] { context_.run(); });
    }

    ~Impl() {
        asio::post(context_, [this] {
            closing_until_ = std::chrono::steady_clock::now() + kLastWords;
            acceptor_.close();
            accept_later_.cancel();
        });
        thread_.join();
    }
    Impl(const Impl&) = delete;
    Impl& operator=(const Impl&) = delete;

    [[nodiscard]] const std::string& url() const { return url_; }
    [[nodiscard]] std::uint16_t port() const { return port_; }
    [[nodiscard]] bool has_viewers() const { return viewers_.load(std::memory_order_relaxed) > 0; }
    void post(Item item) { inbox_.post(std::move(item)); }

    std::vector<std::uint32_t> take_acknowledgements() {
        const std::lock_guard lock(hall_.acknowledged_mutex);
        return std::exchange(hall_.acknowledged, {});
    }

    ServerCounters counters() const {
        const std::lock_guard lock(counters_mutex_);
        ServerCounters counters = counters_;
        counters.left_out = inbox_.left_out();
        return counters;
    }

  private:
    tcp::endpoint listen(const std::string& text, const ListenAddress& address) {
        try {
            const auto found = tcp::resolver(context_).resolve(address.host, std::to_string(address.port),
                                                               tcp::resolver::passive);
            const tcp::endpoint endpoint = found.begin()->endpoint();
            acceptor_.open(endpoint.protocol());
            acceptor_.set_option(asio::socket_base::reuse_address(true));
            acceptor_.bind(endpoint);
            acceptor_.listen();
            return acceptor_.local_endpoint();
        } catch (const boost::system::system_error& error) {
            throw std::runtime_error("page address '" + text +
                                     "': cannot listen there: " + error.code().message());
        }
    }

    void accept() {
        acceptor_.async_accept([this](error_code error, tcp::socket socket) {
            if (!error && hall_.connections < hall_.options.most_connections) {
                error_code ignored;
                socket.set_option(tcp::no_delay(true), ignored);
                socket.set_option(asio::socket_base::send_buffer_size(kSendBuffer), ignored);
                std::make_shared<Visit>(hall_, std::move(socket))->read();
            }
            if (error == asio::error::operation_aborted) return;
            // Without file descriptors accept fails at once, again and again: leave the others their turn.
            if (error) {
                accept_later_.expires_after(std::chrono::milliseconds(100));
                accept_later_.async_wait([this](error_code stopped) {
                    if (!stopped) accept();
                });
            } else {
                accept();
            }
        });
    }

    void tick() {
        timer_.expires_after(kTick);
        timer_.async_wait([this](error_code stopped) {
            if (stopped) return;
            serve();
            tick();
        });
    }

    void serve() {
        const auto now = std::chrono::steady_clock::now();
        const std::vector<Item> items = inbox_.take();
        hall_.audience.take(items, hall_.viewers);
        if (std::any_of(items.begin(), items.end(),
                        [](const Item& item) { return std::holds_alternative<Row>(item); }))
            newest_row_ = now;
        const bool heartbeat = now - newest_heartbeat_ >= kHeartbeat;
        if (heartbeat) newest_heartbeat_ = now;
        hall_.audience.tick(std::chrono::duration<double>(now - newest_row_).count(), heartbeat,
                            hall_.viewers);
        hall_.closing = closing_until_.has_value();
        const std::vector<Watching*> all(hall_.watching.begin(), hall_.watching.end());
        for (Watching* one : all) one->pump();
        viewers_.store(hall_.watching.size(), std::memory_order_relaxed);
        hall_.counters.viewers = hall_.watching.size();
        if (hall_.closing && (hall_.watching.empty() || now > *closing_until_)) context_.stop();
        const std::lock_guard lock(counters_mutex_);
        counters_ = hall_.counters;
    }

    // Before the context: connections that are destroyed with it leave the hall.
    Hall hall_;
    Inbox inbox_;
    mutable std::mutex counters_mutex_;
    ServerCounters counters_;
    asio::io_context context_{1};
    tcp::acceptor acceptor_;
    asio::steady_timer timer_;
    asio::steady_timer accept_later_{context_};
    std::chrono::steady_clock::time_point newest_row_ = std::chrono::steady_clock::now();
    std::chrono::steady_clock::time_point newest_heartbeat_ = newest_row_;
    std::optional<std::chrono::steady_clock::time_point> closing_until_;
    std::atomic<std::size_t> viewers_{0};
    std::string url_;
    std::uint16_t port_ = 0;
    std::thread thread_;
};

Server::Server(const ServerOptions& options) : impl_(std::make_unique<Impl>(options)) {}
Server::~Server() = default;

const std::string& Server::url() const {
    return impl_->url();
}
std::uint16_t Server::port() const {
    return impl_->port();
}
void Server::post(Item item) {
    impl_->post(std::move(item));
}
bool Server::has_viewers() const {
    return impl_->has_viewers();
}
std::vector<std::uint32_t> Server::take_acknowledgements() {
    return impl_->take_acknowledgements();
}
ServerCounters Server::counters() const {
    return impl_->counters();
}

}  // namespace holdfast::wall
