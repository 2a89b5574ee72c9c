// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>

#include "estimator/wall/history.hpp"
#include "tests/wall/examples.hpp"

using namespace holdfast;
using nlohmann::json;

namespace {

// The i-th row of 10 Hz.
wall::Row tenth(std::size_t i) {
    return examples::row(5 * i);
}

std::vector<double> times(const std::vector<wall::Text>& texts) {
    std::vector<double> all;
    for (const wall::Text& text : texts) {
        const json message = json::parse(*text);
        for (const json& t : message.at("columns").at("t")) all.push_back(t.get<double>());
    }
    return all;
}

}  // namespace

TEST_CASE("the history comes whole and in order, finished minutes as shared texts") {
    wall::HistoryTexts history;
    for (std::size_t i = 0; i < 1500; ++i) history.add(tenth(i));
    const auto once = history.texts();
    const auto again = history.texts();
    REQUIRE(once.size() == 3);
    CHECK(once[0] == again[0]);
    CHECK(once[1] == again[1]);
    const auto t = times(once);
    REQUIRE(t.size() == 1500);
    for (std::size_t i = 0; i < t.size(); ++i) CHECK(t[i] == Approx(0.1 * static_cast<double>(i)));
}

TEST_CASE("old minutes are kept at 1 Hz, so that a day stays small") {
    wall::HistoryTexts history(2);
    for (std::size_t i = 0; i < 600 * 5; ++i) history.add(tenth(i));
    const auto texts = history.texts();
    CHECK(json::parse(*texts[0]).at("step_s") == 1.0);
    CHECK(json::parse(*texts[3]).at("step_s") == 0.1);
    const auto t = times(texts);
    CHECK(t.size() == 3 * 60 + 2 * 600);
    CHECK(std::is_sorted(t.begin(), t.end()));
}

TEST_CASE("twenty-four hours at 10 Hz stay below 40 MB") {
    wall::HistoryTexts history;
    wall::Row row = tenth(0);
    row.value.fill(-1234.56789);  // as long as numbers get, exponents apart
    for (std::size_t i = 0; i < 24 * 3600 * 10; ++i) {
        row.time_ns = static_cast<std::int64_t>(i) * 100'000'000;
        history.add(row);
    }
    CHECK(history.bytes() < 40'000'000);
}

TEST_CASE("the report's history never exceeds its capacity and keeps an even step") {
    wall::ThinnedHistory history(100);
    for (std::size_t i = 0; i < 12345; ++i) {
        history.add(tenth(i));
        REQUIRE(history.size() < 100);
    }
    const json j = json::parse(history.json());
    const auto t = j.at("columns").at("t").get<std::vector<double>>();
    REQUIRE(t.size() > 40);
    for (std::size_t i = 1; i < t.size(); ++i) CHECK(t[i] - t[i - 1] == Approx(j.at("step_s").get<double>()));
    CHECK(t.front() == 0.0);
}

TEST_CASE("a row of the report's history is found by its instant") {
    wall::ThinnedHistory history(100);
    for (std::size_t i = 0; i < 150; ++i) history.add(tenth(i));  // every other one is kept
    REQUIRE(history.find(tenth(40).time_ns) != nullptr);
    CHECK(history.find(tenth(40).time_ns)->time_ns == tenth(40).time_ns);
    CHECK(history.find(tenth(41).time_ns) == nullptr);
    CHECK(history.find(tenth(1000).time_ns) == nullptr);
}
