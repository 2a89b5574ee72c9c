// SPDX-License-Identifier: MIT
// The program as a person starts it.
#include <catch2/catch.hpp>
#include <csignal>

#include "estimator/link/frame_receiver.hpp"
#include "tests/end_to_end/process.hpp"
#include "tests/link/link_fixture.hpp"
#include "tests/proto/recording_files.hpp"

namespace holdfast::node {
namespace {

using namespace holdfast::testing;

TEST_CASE("carnode explains itself, and refuses what makes no sense") {
    const TempFolder folder;
    CHECK(run("carnode", {"--version"}, folder.path()).out == "carnode " HOLDFAST_VERSION "\n");
    for (const std::vector<std::string>& words :
         {std::vector<std::string>{"--help"}, {"play", "--help"}, {"drive", "--help"}}) {
        const Ended help = run("carnode", words, folder.path());
        CHECK(help.status == 0);
        CHECK_THAT(help.out,
                   Catch::Contains("Exit status: 0 done, 1 failure, 2 wrong use, 3 done on incomplete"));
    }
    CHECK_THAT(run("carnode", {"drive", "--help"}, folder.path()).out,
               Catch::Contains("open_wheel") && Catch::Contains("CHANNEL:KIND:FROM_S"));
    CHECK(run("carnode", {}, folder.path()).status == 2);
    CHECK(run("carnode", {"play"}, folder.path()).status == 2);
    CHECK(run("carnode", {"play", "x.csv", "--bind", "tcp://127.0.0.1:*", "--pace", "-1"}, folder.path())
              .status == 2);
    CHECK(run("carnode", {"play", "x.csv", "--bind", "tcp://127.0.0.1:*", "--when-full", "explode"},
              folder.path())
              .status == 2);
    const Ended nowhere = run("carnode", {"drive"}, folder.path());
    CHECK(nowhere.status == 2);
    CHECK_THAT(nowhere.err, Catch::Contains("--bind or --record"));
}

TEST_CASE("carnode tells what it cannot play, and where it cannot send") {
    const TempFolder folder;
    const Ended missing =
        run("carnode", {"play", "nowhere.csv", "--bind", "tcp://127.0.0.1:*"}, folder.path());
    CHECK(missing.status == 1);
    CHECK_THAT(missing.err, Catch::Contains("nowhere.csv"));

    const std::string log = folder / "log.hfr";
    write_recording(log, named_stream(1), frames_of_chunks(1, 5, named_stream(1), 401));
    const Ended taken = run("carnode", {"play", log, "--bind", "tcp://127.0.0.1:*:9"}, folder.path());
    CHECK(taken.status == 1);
    CHECK_THAT(taken.err, Catch::Contains("cannot publish on tcp://127.0.0.1:*:9"));
}

TEST_CASE("Ctrl-C ends a stream with its end marker") {
    const TempFolder folder;
    const std::string log = folder / "log.hfr";
    write_recording(log, named_stream(1), frames_of_chunks(1000, 3, named_stream(1), 402));  // 25 minutes
    Process node("carnode", {"play", log, "--bind", "tcp://127.0.0.1:*"}, folder.path());
    REQUIRE(node.says(" on tcp://127.0.0.1:"));
    const std::string said = node.err();
    const std::size_t begin = said.find("tcp://");
    link::FrameReceiver in = receiver(said.substr(begin, said.find_first_of(" \n", begin) - begin));
    REQUIRE(in.receive(kLongEnough).kind == link::Arrival::Kind::stream);
    node.send(SIGINT);
    link::Arrival arrival;
    do arrival = in.receive(kLongEnough);
    while (arrival.kind == link::Arrival::Kind::frames);
    REQUIRE(arrival.kind == link::Arrival::Kind::end);
    CHECK_FALSE(in.end().complete);
    CHECK_THAT(in.end().reason, Catch::Contains("SIGINT"));
    CHECK(in.counters().lost_messages == 0);
    CHECK(node.wait() == 3);
    CHECK_THAT(node.err(), Catch::Contains("stopped by SIGINT") && Catch::Contains("ms late"));
}

TEST_CASE("Ctrl-C while nobody has subscribed ends the program too") {
    const TempFolder folder;
    const std::string log = folder / "log.hfr";
    write_recording(log, named_stream(1), frames_of_chunks(1, 5, named_stream(1), 403));
    Process node("carnode", {"play", log, "--bind", "tcp://127.0.0.1:*"}, folder.path());
    REQUIRE(node.says(" on tcp://127.0.0.1:"));
    node.send(SIGTERM);
    CHECK(node.wait() == 3);
    CHECK_THAT(node.err(), Catch::Contains("stopped by SIGTERM"));
}

}  // namespace
}  // namespace holdfast::node
