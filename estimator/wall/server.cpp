// SPDX-License-Identifier: MIT
// Listening and ticking. Everything runs on one thread: connections (visit.hpp, watching.hpp), viewers and
// the audience need no locks; only what the poster touches has any.
#include "estimator/wall/server.hpp"

#include <unistd.h>

#include <algorithm>
#include <array>
#include <atomic>
#include <boost/asio/io_context.hpp>
#include <boost/asio/ip/tcp.hpp>
#include <boost/asio/post.hpp>
#include <boost/asio/steady_timer.hpp>
#include <mutex>
#include <optional>
#include <stdexcept>
#include <thread>
#include <utility>  // first: Boost 1.74 uses std::exchange without including it, which C++20 brings to light

#include "estimator/wall/connection.hpp"
#include "estimator/wall/hall.hpp"
#include "estimator/wall/inbox.hpp"
#include "estimator/wall/listen_address.hpp"

namespace holdfast::wall {
namespace {

namespace asio = boost::asio;
using tcp = asio::ip::tcp;
using boost::system::error_code;

constexpr int kSendBuffer = 128 * 1024;  // in the kernel: the staleness that a slow viewer may have
constexpr std::chrono::microseconds kTick{16'667};  // 60 a second
constexpr std::chrono::milliseconds kHeartbeat{500};

std::string host_name() {
    std::array<char, 256> name{};
    return ::gethostname(name.data(), name.size() - 1) == 0 ? name.data() : "";
}

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
            closing_until_ = std::chrono::steady_clock::now() + hall_.options.last_words;
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
                const bool ipv6 = socket.local_endpoint(ignored).protocol() == tcp::v6();
                const int descriptor = socket.release(ignored);
                if (!ignored) begin_connection(hall_, context_, descriptor, ipv6);
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
        const std::vector<Pumped*> all(hall_.watching.begin(), hall_.watching.end());
        for (Pumped* one : all) one->pump();
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
