// SPDX-License-Identifier: MIT
// A recorded outing through run, observer and server.
#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>
#include <thread>

#include "estimator/outputs/folder.hpp"
#include "estimator/outputs/run.hpp"
#include "estimator/session/bind.hpp"
#include "estimator/session/car_file.hpp"
#include "estimator/session/log_source.hpp"
#include "estimator/wall/observer.hpp"
#include "tests/temp_folder.hpp"
#include "tests/wall/client.hpp"
#include "tests/wall/examples.hpp"

using namespace holdfast;
using nlohmann::json;

namespace {

const std::string kDemo = HOLDFAST_SOURCE_DIR "/replay_logs/demo/";
constexpr double kUntil_s = 125.0;  // four closings, the last of them slow

// The demonstration's first laps into the folder.
struct Outing {
    explicit Outing(const std::filesystem::path& path, wall::Wall& its_wall) : wall(its_wall) {
        auto car_file = session::read_car_file(kDemo + "car.toml");
        REQUIRE(car_file);
        auto log = session::open_log(kDemo + "outing.hfr", "", false);
        REQUIRE(log);
        source = std::move(*log);
        auto car = session::bind_ride_heights(*car_file, source->info());
        REQUIRE(car);
        adapter.emplace(car->car);
        outputs::Outing about;
        about.car_name = car_file->name;
        about.flap_chord_m = car->car.flap_chord_m;
        about.stream = source->info();
        folder.emplace(path, about);
        wall::Hello hello;
        hello.car_name = car_file->name;
        hello.flap_chord_m = car->car.flap_chord_m;
        hello.channels = source->info();
        observer.emplace(*folder, hello, wall);
        run.emplace(car->car, core::Settings{}, outputs::kDefaultRateHz,
                    std::vector<outputs::Sink*>{&*folder, &*observer});
    }

    void go() {
        Frame frame;
        while (source->next(frame) && frame.time_s() < kUntil_s) {
            adapter->apply(frame);
            run->step(frame);
        }
        run->finish(true);
    }

    wall::Wall& wall;
    std::unique_ptr<session::LogSource> source;
    std::optional<session::FrameAdapter> adapter;
    std::optional<outputs::Folder> folder;
    std::optional<wall::Observer> observer;
    std::optional<outputs::Run> run;
};

std::unique_ptr<wall::Server> small_server() {
    wall::ServerOptions o;
    o.listen = "127.0.0.1:0";
    return std::make_unique<wall::Server>(o);
}

std::vector<std::vector<std::string>> table(const std::filesystem::path& path) {
    std::istringstream lines(examples::read(path));
    std::vector<std::vector<std::string>> rows;
    for (std::string line; std::getline(lines, line);) rows.push_back(examples::cells(line));
    return rows;
}

}  // namespace

TEST_CASE("the wall tells what the files tell, and watching changes no result") {
    const testing::TempFolder temp;
    wall::Wall unseen;
    Outing(temp / "unseen", unseen).go();

    wall::Wall wall;
    wall.server = small_server();
    Outing outing(temp / "seen", wall);
    testing::Watcher viewer(wall.server->port());
    while (!wall.server->has_viewers()) std::this_thread::yield();
    outing.go();

    for (const char* name : {"closures.csv", "estimates.csv", "zones.csv", "summary.json"})
        CHECK(examples::read(temp / "seen" / name) == examples::read(temp / "unseen" / name));

    std::map<int, json> closures, regrowths;
    for (const std::string& text : viewer.until("end")) {
        const json j = json::parse(text);
        if (j.at("kind") == "closures")
            for (const json& closure : j.at("list")) closures[closure.at("number")] = closure;
        if (j.at("kind") == "regrowths")
            for (const json& regrowth : j.at("list")) regrowths[regrowth.at("closure")] = regrowth;
        if (j.at("kind") == "closure") closures[j.at("number")] = j;
        if (j.at("kind") == "regrowth") regrowths[j.at("closure")] = j;
    }
    const auto rows = table(temp / "seen" / "closures.csv");
    REQUIRE(rows.size() == closures.size() + 1);
    REQUIRE(closures.size() >= 3);
    const auto cell = [&](std::size_t row, const std::string& name) {
        const auto at = std::find(rows[0].begin(), rows[0].end(), name);
        return std::stod(rows[row].at(static_cast<std::size_t>(at - rows[0].begin())));
    };
    for (std::size_t row = 1; row < rows.size(); ++row) {
        const int number = static_cast<int>(cell(row, "closure"));
        CHECK(closures.at(number).at("t95").get<double>() == Approx(cell(row, "t95")).epsilon(1e-5));
        CHECK(closures.at(number).at("chords").get<double>() == Approx(cell(row, "chords")).epsilon(1e-5));
        CHECK(closures.at(number).at("margin").at(0).get<double>() ==
              Approx(cell(row, "margin")).epsilon(1e-4));
        const json& curve = regrowths.at(number);
        CHECK(curve.at("final") == true);
        CHECK(curve.at("zone") == static_cast<int>(cell(row, "zone")));
        CHECK(curve.at("time_shut").get<double>() == Approx(cell(row, "time_closed")).margin(1e-4));
        // The curve crosses 95 % at t95: both are medians of the same posterior.
        const auto t = curve.at("t").get<std::vector<double>>();
        const auto share = curve.at("share").get<std::vector<double>>();
        const auto over = std::find_if(share.begin(), share.end(), [](double s) { return s >= 0.95; });
        REQUIRE(over != share.end());
        CHECK(t[static_cast<std::size_t>(over - share.begin())] ==
              Approx(cell(row, "t95")).margin(2.0 * core::Regrowth::kStep_s));
    }
}

TEST_CASE("the outing so far holds the rows of estimates.csv at 10 Hz") {
    const testing::TempFolder temp;
    wall::Wall wall;
    wall.server = small_server();
    Outing outing(temp / "out", wall);
    outing.go();
    // Who has seen the end knows that the server has taken all of it in.
    (void)testing::Watcher(wall.server->port()).until("end");
    testing::Watcher viewer(wall.server->port());
    std::map<std::string, double> rear;  // by time
    for (const std::string& text : viewer.until("closures")) {
        const json j = json::parse(text);
        if (j.at("kind") != "history") continue;
        const json& columns = j.at("columns");
        for (std::size_t i = 0; i < columns.at("t").size(); ++i)
            rear[columns.at("t")[i].dump()] = columns.at("downforce_rear")[i];
    }
    std::size_t found = 0;
    for (const auto& row : table(temp / "out" / "estimates.csv")) {
        if (row[0] == "t") continue;
        const auto there = rear.find(json(std::stod(row[0])).dump());
        if (there == rear.end()) continue;
        ++found;
        REQUIRE(there->second == Approx(std::stod(row[11])).epsilon(1e-5).margin(1e-9));
    }
    CHECK(found == rear.size());
    CHECK(found >= static_cast<std::size_t>(kUntil_s * 10.0) - 1);
}

TEST_CASE("an alarm is acknowledged from the page, and all hear of it, though the outing is over") {
    const testing::TempFolder temp;
    wall::Wall wall;
    wall.server = small_server();
    Outing outing(temp / "out", wall);
    outing.go();
    testing::Watcher viewer(wall.server->port());
    // Whether the alarm is among those at the start or comes after them depends on how busy the machine is.
    const json at_start = json::parse(viewer.until("alarms").back()).at("list");
    const json alarm = at_start.empty() ? json::parse(viewer.until("alarm").back()) : at_start.at(0);
    const auto id = alarm.at("id").get<std::uint32_t>();
    CHECK(alarm.at("acknowledged") == false);
    viewer.send(R"({"do":"acknowledge","id":)" + std::to_string(id) + "}");
    std::vector<wall::RailAlarm> standing = wall.rail.standing();
    while (std::any_of(standing.begin(), standing.end(),
                       [&](const wall::RailAlarm& a) { return a.id == id && !a.acknowledged; })) {
        outing.observer->poll();
        standing = wall.rail.standing();
        std::this_thread::yield();
    }
    CHECK(json::parse(viewer.until("alarm_acknowledged").back()).at("id") == id);
}

TEST_CASE("the report lies in the folder, holds the outing and stays below three megabytes") {
    const testing::TempFolder temp;
    wall::Wall wall;
    Outing(temp / "out", wall).go();
    const std::string html = examples::read(temp / "out" / "report.html");
    CHECK(html.size() < 3'000'000);
    const std::string begin = R"(id="outing">)";
    const std::size_t from = html.find(begin) + begin.size();
    const json outing = json::parse(html.substr(from, html.find("</script>", from) - from));
    std::vector<std::string> kinds;
    for (const json& message : outing.at("messages")) kinds.push_back(message.at("kind"));
    CHECK(kinds ==
          std::vector<std::string>{"hello", "history", "closures", "regrowths", "alarms", "health", "end"});
    CHECK(outing.at("messages").back().at("summary").at("complete") == true);
}
