// SPDX-License-Identifier: MIT
// What the server refuses, through real sockets.
#include <catch2/catch.hpp>

#include "estimator/wall/server.hpp"
#include "tests/wall/client.hpp"
#include "tests/wall/examples.hpp"

using namespace holdfast;
using testing::ask;
using testing::get;
using testing::Watcher;

namespace {

wall::ServerOptions options() {
    wall::ServerOptions o;
    o.listen = "127.0.0.1:0";
    o.files = examples::kFiles;
    o.last_words = std::chrono::milliseconds(100);  // most viewers here do not read to the end
    return o;
}

std::string origin(const wall::Server& server) {
    return "http://127.0.0.1:" + std::to_string(server.port());
}

}  // namespace

TEST_CASE("every answer forbids what the page does not need") {
    const wall::Server server(options());
    for (const char* target : {"/", "/page/main.js", "/nothing", "/wall/stream"}) {
        const testing::Reply reply = get(server.port(), target);
        CHECK(reply.headers.at("content-security-policy") ==
              "default-src 'none'; script-src 'self'; style-src 'self'; connect-src 'self'; img-src 'self' "
              "data:; "
              "frame-ancestors 'none'; base-uri 'none'; form-action 'none'");
        CHECK(reply.headers.at("x-content-type-options") == "nosniff");
        CHECK(reply.headers.at("referrer-policy") == "no-referrer");
        CHECK(reply.headers.at("cache-control") == "no-store");
        CHECK(reply.headers.at("cross-origin-resource-policy") == "same-origin");
        CHECK(reply.headers.at("cross-origin-opener-policy") == "same-origin");
        CHECK_FALSE(reply.headers.contains("access-control-allow-origin"));
        CHECK_FALSE(reply.headers.contains("set-cookie"));
    }
    CHECK(get(server.port(), "/").body == examples::kFiles[0].content);
    CHECK(get(server.port(), "/page/style.css").headers.at("content-type") == "text/css; charset=utf-8");
    CHECK(get(server.port(), "/nothing").status == 404);
}

TEST_CASE("HEAD has the length and no body; a connection serves several requests") {
    const wall::Server server(options());
    const std::string host = "Host: 127.0.0.1\r\n\r\n";
    const auto head = ask(server.port(), "HEAD / HTTP/1.1\r\n" + host);
    REQUIRE(head);
    CHECK(head->headers.at("content-length") == std::to_string(examples::kFiles[0].content.size()));
    const auto first =
        ask(server.port(), "GET /page/main.js HTTP/1.1\r\n" + host + "GET / HTTP/1.1\r\n" + host);
    REQUIRE(first);
    CHECK(first->body == examples::kFiles[1].content);
    CHECK(first->headers.count("connection") == 0);  // stays open
}

TEST_CASE("requests that are too long, have a body, or are none") {
    const wall::Server server(options());
    const std::uint16_t port = server.port();
    CHECK(get(port, "/", "X-Long: " + std::string(20'000, 'x') + "\r\n").status == 431);
    CHECK(get(port, "/" + std::string(20'000, 'x')).status == 431);
    const auto with_body = ask(port, "GET / HTTP/1.1\r\nHost: 127.0.0.1\r\nContent-Length: 5\r\n\r\nhello");
    REQUIRE(with_body);
    CHECK(with_body->status == 413);
    const auto chunked =
        ask(port,
            "GET / HTTP/1.1\r\nHost: 127.0.0.1\r\nTransfer-Encoding: chunked\r\n\r\n5\r\nhello\r\n0\r\n\r\n");
    REQUIRE(chunked);
    CHECK(chunked->status == 413);
    const auto nonsense = ask(port, "\x16\x03\x01 nonsense\r\n\r\n");
    REQUIRE(nonsense);
    CHECK(nonsense->status == 400);
    const auto post = ask(port, "POST / HTTP/1.1\r\nHost: 127.0.0.1\r\nContent-Length: 0\r\n\r\n");
    REQUIRE(post);
    CHECK(post->status == 405);
    CHECK(get(port, "/").status == 200);  // and it lives
}

TEST_CASE("wrong Host, wrong Origin, wrong path") {
    const wall::Server server(options());
    const auto rebound = ask(server.port(), "GET / HTTP/1.1\r\nHost: elsewhere.example\r\n\r\n");
    REQUIRE(rebound);
    CHECK(rebound->status == 421);
    const auto nameless = ask(server.port(), "GET / HTTP/1.1\r\n\r\n");
    REQUIRE(nameless);
    CHECK(nameless->status == 421);
    CHECK(get(server.port(), "/wall/stream", testing::upgrade_lines("http://elsewhere.example")).status ==
          403);
    CHECK(get(server.port(), "/wall/stream", testing::upgrade_lines("")).status == 403);
    CHECK(get(server.port(), "/elsewhere", testing::upgrade_lines(origin(server))).status == 404);
    const testing::Reply welcome = get(server.port(), "/wall/stream", testing::upgrade_lines(origin(server)));
    CHECK(welcome.status == 101);
    CHECK(welcome.headers.at("content-security-policy").starts_with("default-src 'none'"));
}

TEST_CASE("who does not finish a request is not waited for") {
    wall::ServerOptions o = options();
    o.request_limit = std::chrono::milliseconds(100);
    const wall::Server server(o);
    testing::wait_until_closed(server.port(), "");
    testing::wait_until_closed(server.port(), "GET / HTTP/1.1\r\nHost: 127.0.0.1\r\nX-Slow: ");
    // It lives; on a busy machine a request of this test, too, may come too late.
    std::optional<testing::Reply> reply;
    while (!reply) reply = ask(server.port(), "GET / HTTP/1.1\r\nHost: 127.0.0.1\r\n\r\n");
    CHECK(reply->status == 200);
}

TEST_CASE("a viewer who gives no sign of life is sent away, and there are as many as there may be") {
    wall::ServerOptions o = options();
    o.most_viewers = 2;
    o.idle_limit = std::chrono::milliseconds(200);
    wall::Server server(o);
    server.post(examples::hello());
    // Neither reads, so that neither answers the server's pings.
    const Watcher one(server.port()), two(server.port());
    // Two are there until the idle limit has passed; then there is room again.
    unsigned status = 0;
    while (status != 101)
        status = get(server.port(), "/wall/stream", testing::upgrade_lines(origin(server))).status;
    CHECK(status == 101);
}

TEST_CASE("a viewer more than there may be is refused") {
    wall::ServerOptions o = options();
    o.most_viewers = 2;
    wall::Server server(o);
    server.post(examples::hello());
    Watcher one(server.port()), two(server.port());
    CHECK(get(server.port(), "/wall/stream", testing::upgrade_lines(origin(server))).status == 503);
    CHECK(get(server.port(), "/").status == 200);
    (void)one.until("hello");
}

TEST_CASE("where others can reach it, the token is asked for") {
    wall::ServerOptions o = options();
    o.listen = "0.0.0.0:0";
    const wall::Server server(o);
    const std::size_t at = server.url().find("/?token=");
    REQUIRE(at != std::string::npos);
    const std::string target = server.url().substr(at);
    const std::string cookie = "holdfast_wall_" + std::to_string(server.port()) + "=" + target.substr(8);

    CHECK(get(server.port(), "/").status == 403);
    CHECK(get(server.port(), "/page/main.js").status == 403);
    CHECK(get(server.port(), "/wall/stream", testing::upgrade_lines(origin(server))).status == 403);
    CHECK(get(server.port(), target + "0").status == 403);
    const testing::Reply welcome = get(server.port(), target);
    CHECK(welcome.status == 303);
    CHECK(welcome.headers.at("set-cookie") == cookie + "; HttpOnly; SameSite=Lax; Path=/");
    CHECK(get(server.port(), "/", "Cookie: " + cookie + "\r\n").status == 200);
    CHECK(get(server.port(), "/wall/stream",
              testing::upgrade_lines(origin(server)) + "Cookie: " + cookie + "\r\n")
              .status == 101);
}

TEST_CASE("an address that cannot be had is named with the reason") {
    const wall::Server server(options());
    wall::ServerOptions o = options();
    o.listen = "127.0.0.1:" + std::to_string(server.port());
    using Catch::Matchers::Contains;
    CHECK_THROWS_WITH(wall::Server(o), Contains(o.listen) && Contains("in use"));
    o.listen = "203.0.113.7:0";  // of the documentation range (RFC 5737): on no machine
    CHECK_THROWS_WITH(wall::Server(o), Contains(o.listen) && Contains("cannot listen"));
}
