// SPDX-License-Identifier: MIT
// The server through real sockets: what viewers get, and what slow ones cost.
#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>
#include <thread>

#include "estimator/wall/audience.hpp"
#include "estimator/wall/inbox.hpp"
#include "estimator/wall/server.hpp"
#include "tests/wall/client.hpp"
#include "tests/wall/examples.hpp"

using namespace holdfast;
using nlohmann::json;
using testing::Watcher;

namespace {

wall::ServerOptions options() {
    wall::ServerOptions o;
    o.listen = "127.0.0.1:0";
    o.files = examples::kFiles;
    o.last_words = std::chrono::milliseconds(100);  // most viewers here do not read to the end
    return o;
}

std::string kind(const std::string& text) {
    return json::parse(text).at("kind");
}

}  // namespace

TEST_CASE("a late viewer gets the outing so far in order, then what happens") {
    wall::Server server(options());
    server.post(examples::hello());
    for (wall::Item& item : examples::rows(0, 100)) server.post(std::move(item));
    server.post(examples::closure(1));
    server.post(examples::raised(1));

    // Whoever is already there sees that all of it has been taken in.
    Watcher early(server.port());
    std::string seen;
    while (seen.find("\"id\":1") == std::string::npos) seen = early.next();

    Watcher late(server.port());
    for (const char* expected : {"hello", "history", "closures", "regrowths", "alarms"})
        CHECK(kind(late.next()) == expected);
    server.post(examples::closure(2));
    for (Watcher* viewer : {&early, &late})
        CHECK(json::parse(viewer->until("closure").back()).at("number") == 2);
    server.post(examples::row(100));
    json now;
    do now = json::parse(late.until("now").back());
    while (now.at("samples").at("t").empty());
    CHECK(now.at("samples").at("t") == json{2.0});
}

TEST_CASE("an acknowledgement comes to the one who asks for it, and all viewers hear of it") {
    wall::Server server(options());
    server.post(examples::hello());
    server.post(examples::raised(7));
    Watcher one(server.port()), other(server.port());
    for (Watcher* viewer : {&one, &other}) (void)viewer->until("alarms");
    one.send(R"({"do":"acknowledge","id":7})");
    std::vector<std::uint32_t> ids;
    while (ids.empty()) {
        ids = server.take_acknowledgements();
        std::this_thread::yield();
    }
    CHECK(ids == std::vector<std::uint32_t>{7});
    wall::AlarmRail::Change change = examples::raised(7);
    change.alarm.acknowledged = change.acknowledgement = true;
    server.post(change);
    for (Watcher* viewer : {&one, &other})
        CHECK(json::parse(viewer->until("alarm_acknowledged").back()).at("id") == 7);
}

TEST_CASE("a viewer that says anything else is sent away") {
    wall::Server server(options());
    server.post(examples::hello());
    for (const std::string& text :
         {std::string("{}"), std::string(R"({"do":"stop"})"), std::string(1000, 'x')}) {
        Watcher viewer(server.port());
        viewer.send(text);
        viewer.wait_until_closed();
    }
    CHECK(server.take_acknowledgements().empty());
}

TEST_CASE("twenty viewers, one asleep: the poster's 100 000 calls return, and what waits is bounded") {
    wall::Server server(options());
    server.post(examples::hello());
    std::vector<Watcher> viewers;
    for (int i = 0; i < 20; ++i) viewers.emplace_back(server.port());
    // The last one never reads. The others read until the end has come.
    std::vector<std::thread> readers;
    std::vector<std::string> ends(viewers.size() - 1);
    for (std::size_t i = 0; i + 1 < viewers.size(); ++i)
        readers.emplace_back([&, i] { ends[i] = viewers[i].until("end").back(); });

    for (std::uint32_t i = 0; i < 100'000; ++i) {
        server.post(examples::row(i));
        if (i % 100 == 0) server.post(examples::closure(i / 100));
        if (i % 25 == 0) server.post(examples::health(i));
    }
    server.post(std::make_shared<const wall::End>(wall::End{true, "{}"}));
    for (std::thread& reader : readers) reader.join();
    for (const std::string& end : ends) CHECK(json::parse(end).at("complete") == true);
    const wall::ServerCounters counters = server.counters();
    CHECK(counters.viewers == 20);
    // The outing so far has five kinds and a text for each of its 34 minutes; events are bounded.
    CHECK(counters.most_waiting <= wall::Viewer::kEvents + 34 + 7);
}

TEST_CASE("the inbox leaves out what the next item replaces, and nothing else, when nobody empties it") {
    wall::Inbox inbox;
    for (std::size_t i = 0; i < 100'000; ++i) inbox.post(examples::row(i));
    for (std::uint32_t i = 0; i < 1000; ++i) {
        inbox.post(examples::closure(i));
        inbox.post(examples::health(i));
        inbox.post(examples::regrowth(i, false));
    }
    std::size_t history = 0, closures = 0;
    const std::vector<wall::Item> items = inbox.take();
    for (const wall::Item& item : items) {
        if (const auto* row = std::get_if<wall::Row>(&item)) history += row->history ? 1 : 0;
        if (std::holds_alternative<core::Closure>(item)) ++closures;
    }
    CHECK(history == 20'000);
    CHECK(closures == 1000);
    CHECK(items.size() <= wall::Inbox::kCapacity + 20'000 + 1000);
    CHECK(items.size() + inbox.left_out() == 103'000);
}

TEST_CASE("when the server goes, viewers have been sent everything") {
    std::vector<std::string> texts;
    std::thread reader;
    {
        wall::ServerOptions o = options();
        o.last_words = std::chrono::seconds(20);  // however busy the machine
        wall::Server server(o);
        server.post(examples::hello());
        reader = std::thread([&texts, viewer = std::make_shared<Watcher>(server.port())] {
            texts = viewer->until("end");
            viewer->wait_until_closed();
        });
        for (std::uint32_t i = 1; i <= 50; ++i) server.post(examples::closure(i));
        server.post(std::make_shared<const wall::End>(wall::End{true, "{}"}));
    }
    reader.join();
    // What had been taken in before the viewer came is in the list at its start.
    std::size_t closures = 0;
    for (const std::string& text : texts) {
        const json message = json::parse(text);
        if (message.at("kind") == "closures") closures += message.at("list").size();
        if (message.at("kind") == "closure") ++closures;
    }
    CHECK(closures == 50);
}
