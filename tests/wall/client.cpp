// SPDX-License-Identifier: MIT
#include "tests/wall/client.hpp"

#include <boost/asio/io_context.hpp>
#include <boost/asio/ip/tcp.hpp>
#include <boost/beast/core.hpp>
#include <boost/beast/http.hpp>
#include <boost/beast/websocket.hpp>
#include <chrono>
#include <stdexcept>
#include <utility>  // first: Boost 1.74 needs it in C++20

namespace holdfast::testing {
namespace {

namespace asio = boost::asio;
namespace beast = boost::beast;
namespace http = beast::http;
namespace websocket = beast::websocket;
using tcp = asio::ip::tcp;
using boost::system::error_code;

constexpr std::chrono::seconds kPatience{20};

std::string host_of(std::uint16_t port) {
    return "127.0.0.1:" + std::to_string(port);
}

// Runs one asynchronous operation to its end.
template <class Start>
error_code finish(asio::io_context& context, Start start) {
    std::optional<error_code> done;
    start([&done](error_code error, std::size_t = 0) { done = error; });
    context.restart();
    const auto deadline = std::chrono::steady_clock::now() + kPatience;
    while (!done && std::chrono::steady_clock::now() < deadline) context.run_one_until(deadline);
    if (!done) throw std::runtime_error("nothing came for twenty seconds");
    return *done;
}

tcp::socket connected(asio::io_context& context, std::uint16_t port) {
    tcp::socket socket(context);
    socket.connect({asio::ip::address_v4::loopback(), port});
    return socket;
}

}  // namespace

std::optional<Reply> ask(std::uint16_t port, const std::string& bytes) {
    asio::io_context context;
    tcp::socket socket = connected(context, port);
    error_code ignored;
    asio::write(socket, asio::buffer(bytes), ignored);  // the server may have seen enough before the end
    beast::flat_buffer buffer;
    http::response_parser<http::string_body> parser;
    parser.skip(bytes.starts_with("HEAD"));
    const error_code error =
        finish(context, [&](auto done) { http::async_read(socket, buffer, parser, std::move(done)); });
    if (error) return std::nullopt;
    Reply reply;
    reply.status = parser.get().result_int();
    for (const auto& field : parser.get()) {
        std::string name(field.name_string());
        for (char& c : name) c = static_cast<char>(std::tolower(static_cast<unsigned char>(c)));
        reply.headers[name] = std::string(field.value());
    }
    reply.body = parser.get().body();
    return reply;
}

Reply get(std::uint16_t port, const std::string& target, const std::string& lines) {
    const auto reply =
        ask(port, "GET " + target + " HTTP/1.1\r\nHost: " + host_of(port) + "\r\n" + lines + "\r\n");
    if (!reply) throw std::runtime_error("closed without an answer");
    return *reply;
}

void wait_until_closed(std::uint16_t port, const std::string& bytes) {
    asio::io_context context;
    tcp::socket socket = connected(context, port);
    asio::write(socket, asio::buffer(bytes));
    std::array<char, 64> into{};
    error_code error;
    while (!error)
        error =
            finish(context, [&](auto done) { socket.async_read_some(asio::buffer(into), std::move(done)); });
}

class Watcher::Impl {
  public:
    explicit Impl(std::uint16_t port) : socket(connected(context, port)) {
        socket.set_option(websocket::stream_base::decorator([&](websocket::request_type& request) {
            request.set(http::field::origin, "http://" + host_of(port));
        }));
        const error_code error = finish(context, [&](auto done) {
            socket.async_handshake(host_of(port), "/wall/stream", std::move(done));
        });
        if (error) throw std::runtime_error("the WebSocket is refused: " + error.message());
    }

    error_code read(std::string& text) {
        beast::flat_buffer buffer;
        const error_code error =
            finish(context, [&](auto done) { socket.async_read(buffer, std::move(done)); });
        text = beast::buffers_to_string(buffer.data());
        return error;
    }

    asio::io_context context;
    websocket::stream<tcp::socket> socket;
};

Watcher::Watcher(std::uint16_t port) : impl_(std::make_unique<Impl>(port)) {}
Watcher::~Watcher() = default;
Watcher::Watcher(Watcher&&) noexcept = default;

std::string Watcher::next() {
    std::string text;
    if (const error_code error = impl_->read(text))
        throw std::runtime_error("no message: " + error.message());
    return text;
}

std::vector<std::string> Watcher::until(const std::string& kind) {
    std::vector<std::string> all;
    do {
        all.push_back(next());
    } while (!all.back().starts_with(R"({"kind":")" + kind + "\""));
    return all;
}

void Watcher::send(const std::string& text) {
    impl_->socket.text(true);
    const error_code error = finish(
        impl_->context, [&](auto done) { impl_->socket.async_write(asio::buffer(text), std::move(done)); });
    if (error) throw std::runtime_error("not sent: " + error.message());
}

void Watcher::wait_until_closed() {
    std::string text;
    while (!impl_->read(text)) {
    }
}

std::string upgrade_lines(const std::string& origin) {
    return "Connection: Upgrade\r\nUpgrade: websocket\r\nSec-WebSocket-Version: 13\r\n"
           "Sec-WebSocket-Key: dGhlIHNhbXBsZSBub25jZQ==\r\n" +
           (origin.empty() ? std::string{} : "Origin: " + origin + "\r\n");
}

}  // namespace holdfast::testing
