// SPDX-License-Identifier: MIT
// holdfast: the estimator's command line. Reads the words; estimator/commands does the work.
#include <CLI/CLI.hpp>
#include <exception>
#include <iostream>

#include "estimator/commands/cautions.hpp"
#include "estimator/commands/commands.hpp"
#include "proto/vocabulary/exit_status.hpp"

namespace {

using namespace holdfast::commands;

constexpr const char* kStatuses =
    "Exit status: 0 done, 1 failure, 2 wrong use, 3 done on incomplete input (summary.json then says\n"
    "\"complete\": false and why).\n";

CLI::App* command(CLI::App& app, const char* name, const char* what) {
    CLI::App* sub = app.add_subcommand(name, what);
    sub->set_version_flag("--version", "holdfast " HOLDFAST_VERSION, "Show the version and leave");
    return sub;
}

void add_results(CLI::App& sub, ResultOptions& results) {
    sub.add_option("--car", results.car, "Car file (TOML); `holdfast keys` describes it")->required();
    sub.add_option("--out", results.out,
                   "Folder for the results; made where missing, earlier results replaced")
        ->required();
    sub.add_option("--rate", results.rate_hz, "Rows a second in estimates.csv")
        ->check(CLI::Range(0.1, 1000.0))
        ->capture_default_str();
    sub.add_option("--page", results.page,
                   "Serve the wall page here, e.g. 127.0.0.1:8080; an address that other machines reach asks "
                   "them for a token");
    sub.add_flag("--json", results.json, "Closings, alarms and summary as JSON lines on standard output");
    sub.footer(std::string("\n") + kStatuses + "\n" + cautions());
}

void add_log_reading(CLI::App& sub, std::string& channels, bool& strict) {
    sub.add_option("--channels", channels, "Channel map (TOML) of a log whose columns have other names");
    sub.add_flag("--strict", strict, "Numbers that are not finite and repeated times are errors, not counts");
}

}  // namespace

int main(int argc, char** argv) {
    CLI::App app(
        "Estimates a racing car's downforce after its rear-wing flap has closed, and judges each closing\n"
        "at the moment the brakes come on: live, or from a log.",
        "holdfast");
    app.set_version_flag("--version", "holdfast " HOLDFAST_VERSION, "Show the version and leave");
    app.require_subcommand(1);
    app.footer("\n" + cautions());

    ReplayOptions replaying;
    CLI::App* replay_words =
        command(app, "replay", "Estimate from a log (.csv, .csv.gz, .csv.zst or recording .hfr)");
    replay_words->add_option("log", replaying.log, "The log")->required();
    add_results(*replay_words, replaying.results);
    add_log_reading(*replay_words, replaying.channels, replaying.strict);
    bool as_live = false;
    replay_words->add_flag(
        "--as-live", as_live,
        "Use only what a live run would have known at each moment, to the bit. Without it the areas of "
        "estimates.csv are smoothed: each uses the whole outing");

    LiveOptions living;
    CLI::App* live_words = command(app, "live", "Estimate from an on-car node, as the car drives");
    live_words->add_option("--from", living.from, "Endpoint of the node, e.g. tcp://127.0.0.1:5570")
        ->required();
    add_results(*live_words, living.results);
    live_words->add_option("--publish", living.publish,
                           "Publish estimates, closings, alarms and health here, e.g. tcp://127.0.0.1:5571");

    ConvertOptions converting;
    CLI::App* convert_words =
        command(app, "convert", "Turn a CSV log into a recording or back, losing nothing");
    convert_words->add_option("in", converting.in, "The log to read")->required();
    convert_words
        ->add_option("out", converting.out, "The log to write: .hfr (recording), .csv, .csv.gz or .csv.zst")
        ->required();
    add_log_reading(*convert_words, converting.channels, converting.strict);

    SettleOptions settling;
    CLI::App* settle_words =
        command(app, "settle", "Hold the car file against an outing, and propose a corrected one");
    settle_words->add_option("log", settling.log, "The log")->required();
    settle_words->add_option("--car", settling.car, "Car file (TOML) to hold against it")->required();
    settle_words->add_option(
        "--out", settling.out,
        "Write the proposed car file here: every line as it was, but for the values that "
        "file and data disagree about. Without it only the report");
    add_log_reading(*settle_words, settling.channels, settling.strict);
    settle_words->footer(
        "\nExit status: 0 done, 1 failure, 2 wrong use, 3 done on incomplete input: what was read of it is "
        "told.\n\n" +
        cautions());

    CLI::App* keys_words =
        command(app, "keys", "Show every key of the car file: unit, range, default, meaning");

    try {
        app.parse(argc, argv);
    } catch (const CLI::ParseError& error) {
        return app.exit(error) == 0 ? holdfast::kDone : holdfast::kWrongUse;
    }

    try {
        if (!as_live) replaying.results.knowledge = holdfast::outputs::Knowledge::of_the_outing;
        if (replay_words->parsed()) return replay(replaying);
        if (live_words->parsed()) return live(living);
        if (convert_words->parsed()) return convert(converting);
        if (settle_words->parsed()) return settle(settling);
        if (keys_words->parsed()) return keys();
    } catch (const std::exception& error) {
        std::cerr << "error: " << error.what() << '\n';
    }
    return holdfast::kFailed;
}
