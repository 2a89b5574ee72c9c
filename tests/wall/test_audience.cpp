// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>

#include "estimator/wall/audience.hpp"
#include "tests/wall/examples.hpp"

using namespace holdfast;
using nlohmann::json;
using wall::Audience;
using wall::Viewer;

namespace {

// An audience with viewers who take all they are given, when they are asked to.
struct Stand {
    explicit Stand(std::size_t count) : viewers(count) {
        for (Viewer& viewer : viewers) all.push_back(&viewer);
    }
    void tell(const std::vector<wall::Item>& items) { audience.take(items, all); }
    void tick(bool heartbeat = false) { audience.tick(0.01, heartbeat, all); }
    std::vector<wall::Text> drain(Viewer& viewer) {
        std::vector<wall::Text> texts;
        while (wall::Text text = audience.next(viewer)) texts.push_back(text);
        return texts;
    }

    Audience audience;
    std::vector<Viewer> viewers;
    std::vector<Viewer*> all;
};

std::vector<std::string> kinds(const std::vector<wall::Text>& texts) {
    std::vector<std::string> all;
    for (const wall::Text& text : texts) all.push_back(json::parse(*text).at("kind"));
    return all;
}

using Kinds = std::vector<std::string>;

}  // namespace

TEST_CASE("nothing is sent before a stream has begun") {
    Stand stand(1);
    stand.tick(true);
    CHECK(stand.drain(stand.viewers[0]).empty());
}

TEST_CASE("whoever comes late is told the outing so far, in order, and then what happens") {
    Stand stand(1);
    Viewer& viewer = stand.viewers[0];
    stand.audience.take(std::vector<wall::Item>{examples::hello()}, {});
    stand.audience.take(examples::rows(0, 1000), {});
    stand.audience.take(std::vector<wall::Item>{examples::closure(1), examples::regrowth(1, true),
                                                examples::raised(1), examples::health(1)},
                        {});
    const auto so_far = stand.drain(viewer);
    CHECK(kinds(so_far) == Kinds{"hello", "history", "closures", "regrowths", "alarms", "health"});
    CHECK(json::parse(*so_far[1]).at("columns").at("t").size() == 200);
    CHECK(json::parse(*so_far[2]).at("list").at(0).at("number") == 1);

    stand.tell({examples::closure(2), examples::raised(2), examples::row(1000)});
    stand.tick();
    const auto then = stand.drain(viewer);
    CHECK(kinds(then) == Kinds{"closure", "alarm", "now"});
    CHECK(json::parse(*then[2]).at("samples").at("t") == json{20.0});  // the one row that it had not seen
}

TEST_CASE("viewers who keep up share their texts") {
    Stand stand(20);
    stand.tell({examples::hello()});
    for (Viewer& viewer : stand.viewers) stand.drain(viewer);
    stand.tell(examples::rows(0, 3));
    stand.tell({examples::health(1), examples::regrowth(1, false), examples::closure(1)});
    stand.tick();
    const auto first = stand.drain(stand.viewers[0]);
    CHECK(kinds(first) == Kinds{"closure", "regrowth", "health", "now"});
    for (Viewer& viewer : stand.viewers)
        if (&viewer != &stand.viewers[0]) CHECK(stand.drain(viewer) == first);
}

TEST_CASE("a now is sent once a tick at most, and without rows only as a heartbeat") {
    Stand stand(1);
    Viewer& viewer = stand.viewers[0];
    stand.tell({examples::hello()});
    stand.drain(viewer);
    stand.tell(examples::rows(0, 1));
    stand.tick();
    CHECK(kinds(stand.drain(viewer)) == Kinds{"now"});
    stand.tell(examples::rows(1, 2));
    CHECK(stand.drain(viewer).empty());
    stand.tick();
    CHECK(kinds(stand.drain(viewer)) == Kinds{"now"});
    stand.tick();
    CHECK(stand.drain(viewer).empty());
    stand.tick(true);
    CHECK(kinds(stand.drain(viewer)) == Kinds{"now"});
}

TEST_CASE("a slow viewer gets the newest of what changes all the time and every event") {
    Stand stand(1);
    Viewer& viewer = stand.viewers[0];
    stand.tell({examples::hello()});
    stand.drain(viewer);
    for (std::uint32_t i = 1; i <= 50; ++i) {
        stand.tell({examples::health(i), examples::regrowth(i, false), examples::closure(i)});
        stand.tell(examples::rows(i, i + 1));
        stand.tick();
    }
    const auto texts = stand.drain(viewer);
    REQUIRE(texts.size() == 50 + 3);
    for (std::uint32_t i = 1; i <= 50; ++i) CHECK(json::parse(*texts[i - 1]).at("number") == i);
    CHECK(json::parse(*texts[50]).at("closure") == 50);
    CHECK(json::parse(*texts[52]).at("samples").at("t").size() == 50);
    CHECK(viewer.resynchronised() == 0);
}

TEST_CASE("a viewer some seconds behind misses no row; beyond that it gets 10 Hz and is told so") {
    Stand stand(1);
    Viewer& viewer = stand.viewers[0];
    stand.tell({examples::hello()});
    stand.drain(viewer);
    stand.tell(examples::rows(0, Audience::kRecentRows));
    stand.tick();
    json now = json::parse(*stand.drain(viewer).at(0));
    CHECK(now.at("samples").at("t").size() == Audience::kRecentRows);
    CHECK_FALSE(now.contains("thinned"));

    const std::size_t end = 5 * Audience::kRecentRows;
    stand.tell(examples::rows(Audience::kRecentRows, end));
    stand.tick();
    now = json::parse(*stand.drain(viewer).at(0));
    CHECK(now.at("thinned") == true);
    const auto t = now.at("samples").at("t").get<std::vector<double>>();
    CHECK(t.size() == Audience::kRecentRows + 3 * Audience::kRecentRows / 5);
    CHECK(t.front() == Approx(12.0));
    CHECK(t.back() == Approx(0.02 * static_cast<double>(end - 1)));
    CHECK(std::adjacent_find(t.begin(), t.end(), std::greater_equal<>()) == t.end());
    CHECK(viewer.thinned() == 1);
    CHECK(viewer.resynchronised() == 0);
}

TEST_CASE("a viewer who never takes anything keeps a bounded number of texts waiting, and loses nothing") {
    Stand stand(1);
    Viewer& viewer = stand.viewers[0];
    stand.tell({examples::hello()});
    stand.drain(viewer);
    std::size_t most = 0;
    for (std::uint32_t i = 1; i <= 2000; ++i) {
        stand.tell({examples::closure(i), examples::raised(i)});
        stand.tick();
        most = std::max(most, viewer.waiting());
    }
    CHECK(most == Viewer::kEvents);
    const auto texts = stand.drain(viewer);
    CHECK(kinds(texts) == Kinds{"hello", "history", "closures", "regrowths", "alarms"});
    CHECK(json::parse(*texts[2]).at("list").size() == 2000);
    CHECK(json::parse(*texts[4]).at("list").size() == 2000);
    CHECK(viewer.resynchronised() == 1);
}

TEST_CASE("a viewer who has lost touch with the traces is given the outing anew") {
    Stand stand(1);
    Viewer& viewer = stand.viewers[0];
    stand.tell({examples::hello()});
    stand.drain(viewer);
    stand.tell(examples::rows(0, 5 * Audience::kRecentThin + 1000));
    stand.tick();
    CHECK(kinds(stand.drain(viewer)).at(0) == "hello");
    CHECK(viewer.resynchronised() == 1);
}

TEST_CASE("when the node starts anew every viewer is greeted anew") {
    Stand stand(2);
    stand.tell({examples::hello()});
    stand.tell({examples::closure(1), examples::raised(1)});
    for (Viewer& viewer : stand.viewers) stand.drain(viewer);
    stand.tell({examples::hello(2)});
    for (Viewer& viewer : stand.viewers) {
        const auto texts = stand.drain(viewer);
        CHECK(json::parse(*texts.at(0)).at("stream") == 2);
        CHECK(json::parse(*texts.at(2)).at("list").empty());  // closings
        // What nobody has acknowledged is still to be seen.
        CHECK(json::parse(*texts.at(4)).at("list").size() == 1);
    }
}

TEST_CASE("who is given the outing so far slowly gets it whole before what has happened since") {
    Stand stand(1);
    Viewer& viewer = stand.viewers[0];
    stand.tell({examples::hello()});
    stand.tell({examples::closure(1)});
    CHECK(json::parse(*stand.audience.next(viewer)).at("kind") == "hello");
    stand.tell({examples::closure(2)});
    stand.tick(true);
    CHECK(kinds(stand.drain(viewer)) ==
          Kinds{"history", "closures", "regrowths", "alarms", "closure", "now"});
}
