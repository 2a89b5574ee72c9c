// SPDX-License-Identifier: MIT
// carnode: the on-car node, built for a PC. Reads the words of the command line; firmware_host/node does the
// work.
#include <CLI/CLI.hpp>
#include <cstdio>
#include <exception>
#include <map>

#include "firmware_host/node/drive.hpp"
#include "firmware_host/node/play.hpp"
#include "proto/vocabulary/exit_status.hpp"

namespace {

using namespace holdfast::node;
using holdfast::link::WhenFull;

constexpr const char* kStatuses =
    "Exit status: 0 done, 1 failure, 2 wrong use, 3 done on incomplete input or stopped.\n";

CLI::App* command(CLI::App& app, const char* name, const char* what) {
    CLI::App* sub = app.add_subcommand(name, what);
    sub->set_version_flag("--version", "carnode " HOLDFAST_VERSION, "Show the version and leave");
    return sub;
}

CLI::Option* add_link(CLI::App& sub, LinkOptions& link) {
    CLI::Option* bind = sub.add_option(
        "--bind", link.bind, "Endpoint to send on, e.g. tcp://127.0.0.1:5570; port * for any free one");
    sub.add_option("--pace", link.pace, "Times real time; 0: as fast as it goes")
        ->check(CLI::Range(0.0, 1e6))
        ->capture_default_str();
    sub.add_option("--wait", link.wait, "Begin when this many have subscribed; 0: at once")
        ->capture_default_str();
    sub.add_option("--when-full", link.when_full,
                   "When a subscriber is too slow: wait for it, or drop its messages as a live car does")
        ->transform(CLI::CheckedTransformer(
            std::map<std::string, WhenFull>{{"wait", WhenFull::wait}, {"drop", WhenFull::drop}}))
        ->default_str(link.when_full == WhenFull::wait ? "wait" : "drop");
    sub.add_option("--batch-ms", link.batch_ms,
                   "Samples within so many milliseconds of the clock travel in one message")
        ->check(CLI::Range(0.0, 1000.0))
        ->capture_default_str();
    return bind;
}

int run(int argc, char** argv) {
    CLI::App app("Streams a racing car's samples: of a log, or of a simulated car.", "carnode");
    app.set_version_flag("--version", "carnode " HOLDFAST_VERSION, "Show the version and leave");
    app.require_subcommand(1);
    app.footer(std::string("\n") + kStatuses);

    PlayOptions playing;
    CLI::App* play_words = command(app, "play", "Stream a log (.csv, .csv.gz, .csv.zst or recording .hfr)");
    play_words->add_option("log", playing.log, "The log")->required();
    play_words->add_option("--car", playing.car, "Car file (TOML) that the log is checked against first");
    add_link(*play_words, playing.link)->required();
    play_words->add_option("--channels", playing.channels,
                           "Channel map (TOML) of a log whose columns have other names");
    play_words->add_option("--start", playing.start_s, "Begin at this time of the log, s");
    play_words->add_option("--end", playing.end_s, "End before this time of the log, s");
    play_words->footer(std::string("\n") + kStatuses);

    DriveOptions driving;
    driving.link.when_full = WhenFull::drop;
    CLI::App* drive_words = command(app, "drive", "Drive a simulated car, onto the link or into a recording");
    drive_words->add_option("--scenario", driving.scenario, "Car, track and weather; see below")
        ->capture_default_str();
    drive_words->add_option("--seed", driving.seed, "Of everything random")->capture_default_str();
    drive_words->add_option("--laps", driving.laps, "Instead of the scenario's own number")
        ->check(CLI::Range(1, 1000));
    drive_words->add_option("--fault", driving.faults, "Spoil a channel; see below; may be given again");
    CLI::Option* bind = add_link(*drive_words, driving.link);
    CLI::Option* record = drive_words->add_option("--record", driving.record, "Recording (.hfr) to write");
    drive_words->add_option("--truth", driving.truth, "Folder for the truth behind it (CSV)");
    drive_words->add_option("--write-car", driving.car,
                            "Write the car file, as a workshop would have measured it");
    drive_words->footer("\n" + drive_help() + "\n" + kStatuses);

    try {
        app.parse(argc, argv);
        if (drive_words->parsed() && bind->empty() && record->empty())
            throw CLI::RequiredError("--bind or --record");
    } catch (const CLI::ParseError& error) {
        return app.exit(error) == 0 ? holdfast::kDone : holdfast::kWrongUse;
    }

    return play_words->parsed() ? play(playing) : drive(driving);
}

}  // namespace

int main(int argc, char** argv) {
    try {
        return run(argc, argv);
    } catch (const std::exception& error) {
        std::fprintf(stderr, "error: %s\n", error.what());
    }
    return holdfast::kFailed;
}
