// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <sstream>

#include "estimator/outputs/terminal.hpp"
#include "tests/outputs/examples.hpp"

using namespace holdfast;
using Catch::Contains;
using examples::known_closure;

TEST_CASE("a closing's line carries units and uncertainties") {
    CHECK_THAT(outputs::closure_line(known_closure()),
               Contains("closing 5") && Contains("lap 2 zone 3") && Contains("90.0 m/s") &&
                   Contains("95 % back 120 ms after shut (95 % interval 100 to 150 ms)") &&
                   Contains("margin 0.068 ± 0.013 s") && Contains("110 ± 40 N missing at the brakes: full"));
}

TEST_CASE("a closing's line says unknown where the data could not tell") {
    core::Closure c = known_closure();
    c.reattachment_known = false;
    c.verdict = core::Verdict::unclear;
    CHECK_THAT(outputs::closure_line(c), Contains("reattachment unknown") &&
                                             Contains("downforce at the brakes unknown") &&
                                             !Contains("full"));
    c = known_closure();
    c.whole = false;
    c.plateau = 0.6;
    CHECK_THAT(outputs::closure_line(c), Contains("settles at 60 %") && !Contains("margin"));
    c = known_closure();
    c.braked = false;
    CHECK_THAT(outputs::closure_line(c), Contains("no braking followed") && !Contains("full"));
}

TEST_CASE("an alarm that could not be computed reads unknown") {
    CHECK_THAT(outputs::alarm_line(examples::alarm(core::AlarmKind::unknown_at_brakes, 6), {}),
               Contains("ALARM") && Contains("closing 6") && Contains("unknown"));

    core::Alarm stale = examples::alarm(core::AlarmKind::data_stale);
    stale.channel = Channel::load_rr;
    CHECK_THAT(outputs::alarm_line(stale, {}),
               Contains("stale") && Contains("unknown") && Contains("load_rr"));
}

TEST_CASE("the alarm of short downforce says how much and how sure") {
    core::Alarm alarm = examples::alarm(core::AlarmKind::short_at_brakes, 5);
    alarm.time_ns = 117'900'000'000;
    alarm.probability = 0.97;
    alarm.shortfall_n = {690.0, 120.0};
    CHECK_THAT(outputs::alarm_line(alarm, {}),
               Contains("117.90 s") && Contains("closing 5") && Contains("690 ± 120 N") && Contains("0.97"));
}

TEST_CASE("the terminal colours alarms only where asked, and writes a status line only where there is one") {
    const testing::TempFolder folder;
    outputs::Folder files(folder.path(), {});
    std::ostringstream plain;
    std::ostringstream coloured;
    std::ostringstream status;
    outputs::Terminal piped(plain, nullptr, outputs::Style::plain, files);
    outputs::Terminal shown(coloured, &status, outputs::Style::colour, files);
    for (outputs::Terminal* terminal : {&piped, &shown}) {
        terminal->on_estimate({});
        terminal->on_alarm(examples::alarm(core::AlarmKind::data_stale));
        terminal->on_end({.complete = false, .reason = "stopped by hand"});
    }
    CHECK(plain.str().find('\033') == std::string::npos);
    CHECK(plain.str().find('\r') == std::string::npos);
    CHECK(coloured.str().find("\033[1;31mALARM") != std::string::npos);
    CHECK(status.str().find('\r') != std::string::npos);
    // Nothing has been seen yet: no number is shown.
    CHECK_THAT(status.str(), Contains("downforce unknown") && !Contains(" N"));
    CHECK_THAT(plain.str(), Contains("INCOMPLETE: stopped by hand") && Contains(folder.path().string()));
}

TEST_CASE("the summary's line of the link leaves out what has not happened") {
    const testing::TempFolder folder;
    outputs::Folder files(folder.path(), {});
    files.set_link_counters({{"frames", 400}, {"lost_frames", 3}, {"damaged", 0}});
    CHECK_THAT(outputs::summary_lines(files, {}), Contains("  link: frames 400, lost frames 3\n"));
}
