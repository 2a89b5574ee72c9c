// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <set>

#include "estimator/wall/answer.hpp"
#include "estimator/wall/listen_address.hpp"
#include "tests/wall/examples.hpp"

using namespace holdfast;
using wall::answer;
using wall::Asked;
using wall::House;

namespace {

House at_home() {
    return {.files = examples::kFiles, .loopback = true, .name = "127.0.0.1", .token = {}, .cookie_name = {}};
}
House open_house() {
    return {.files = examples::kFiles,
            .loopback = false,
            .name = "pitwall",
            .token = "0123abcd",
            .cookie_name = "wall"};
}
Asked get(std::string_view target, std::string_view host = "127.0.0.1:8080") {
    return {.method = "GET", .target = target, .host = host, .origin = {}, .cookie = {}};
}

}  // namespace

TEST_CASE("files are found by name, the page's own at the root, and nothing else is") {
    CHECK(answer(get("/"), at_home()).body == examples::kFiles[0].content);
    CHECK(answer(get("/?x=1"), at_home()).status == 200);
    CHECK(answer(get("/page/main.js"), at_home()).type == "text/javascript; charset=utf-8");
    for (const char* target : {"/page/", "/page/none.js", "/page/../CMakeLists.txt", "/page/%2e%2e/x",
                               "/main.js", "//", "", "*", "http://127.0.0.1/"})
        CHECK(answer(get(target), at_home()).status == 404);
}

TEST_CASE("only GET and HEAD") {
    for (const char* method : {"POST", "PUT", "DELETE", "OPTIONS", "TRACE", "get"}) {
        Asked asked = get("/");
        asked.method = method;
        CHECK(answer(asked, at_home()).status == 405);
    }
    Asked head = get("/");
    head.method = "HEAD";
    CHECK(answer(head, at_home()).status == 200);
}

TEST_CASE("on loopback, only names of this machine") {
    for (const char* host :
         {"127.0.0.1:8080", "127.0.0.1", "localhost:9", "LocalHost", "[::1]:8080", "127.9.9.9:1"})
        CHECK(answer(get("/", host), at_home()).status == 200);
    for (const char* host :
         {"", "elsewhere.example", "127.0.0.1.elsewhere.example:8080", "localhost.elsewhere.example",
          "192.168.1.4:8080", "[::2]:8080", "[::1", "127.0.0.1@elsewhere.example"})
        CHECK(answer(get("/", host), at_home()).status == 421);
}

TEST_CASE("beyond loopback, numeric addresses and the machine's name, with the token") {
    House house = open_house();
    house.token.clear();  // the names alone
    for (const char* host : {"192.168.1.4:8080", "[fe80::1]:8080", "PitWall:8080", "localhost"})
        CHECK(answer(get("/", host), house).status == 200);
    for (const char* host : {"elsewhere.example", "pitwall.elsewhere.example", "192.168.1.4.example"})
        CHECK(answer(get("/", host), house).status == 421);
}

TEST_CASE("without the token nothing is shown; with it the cookie is given, and the cookie opens") {
    const House house = open_house();
    for (const char* target : {"/", "/page/main.js", "/wall/stream", "/?token=", "/?token=0123abce",
                               "/?token=0123abcd0", "/page/main.js?token=0123abcd"})
        CHECK(answer(get(target), house).status == 403);

    const wall::Answer welcome = answer(get("/?token=0123abcd"), house);
    CHECK(welcome.status == 303);
    CHECK(welcome.more[0] == std::pair<std::string, std::string>{"Location", "/"});
    CHECK(welcome.more[1].second == "wall=0123abcd; HttpOnly; SameSite=Lax; Path=/");

    Asked asked = get("/");
    asked.cookie = "other=1; wall=0123abcd";
    CHECK(answer(asked, house).status == 200);
    for (const char* cookie : {"wall=0123abc", "xwall=0123abcd", "wall", "wall="}) {
        asked.cookie = cookie;
        CHECK(answer(asked, house).status == 403);
    }
}

TEST_CASE("a WebSocket is given to the server's own page") {
    Asked asked = get("/wall/stream");
    CHECK(answer(asked, at_home()).status == 426);
    asked.upgrade = true;
    asked.origin = "http://127.0.0.1:8080";
    CHECK(answer(asked, at_home()).upgrade);
    for (const char* origin : {"", "null", "http://elsewhere.example", "http://127.0.0.1:8081",
                               "https://127.0.0.1:8080", "http://127.0.0.1:8080.elsewhere.example"}) {
        asked.origin = origin;
        CHECK(answer(asked, at_home()).status == 403);
        CHECK_FALSE(answer(asked, at_home()).upgrade);
    }
    asked.target = "/";
    CHECK(answer(asked, at_home()).status == 404);
}

TEST_CASE("tokens have 128 bits and differ") {
    std::set<std::string> tokens;
    for (int i = 0; i < 100; ++i) tokens.insert(wall::random_token());
    CHECK(tokens.size() == 100);
    for (const std::string& token : tokens) CHECK(token.size() == 32);
}

TEST_CASE("HOST:PORT is read, and refused with what was expected") {
    CHECK(wall::listen_address("127.0.0.1:8080").port == 8080);
    CHECK(wall::listen_address("[::1]:0").host == "::1");
    CHECK(wall::listen_address("pitwall:80").host == "pitwall");
    using Catch::Matchers::Contains;
    CHECK_THROWS_WITH(wall::listen_address("8080"), Contains("'8080'") && Contains("HOST:PORT"));
    CHECK_THROWS_WITH(wall::listen_address(":8080"), Contains("HOST:PORT"));
    CHECK_THROWS_WITH(wall::listen_address("::1:8080"), Contains("brackets"));
    for (const char* port : {"a:", "a:65536", "a:-1", "a:80x", "a: 80"})
        CHECK_THROWS_WITH(wall::listen_address(port), Contains("65535"));
}
