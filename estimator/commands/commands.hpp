// SPDX-License-Identifier: MIT
// The commands of `holdfast`, apart from how their words are read off the command line. Each returns the
// program's exit status; what went wrong stands on standard error by then.
#pragma once

#include <string>

#include "estimator/outputs/run.hpp"

namespace holdfast::commands {

// What replay and live have in common.
struct ResultOptions {
    std::string car;  // car file
    std::string out;  // folder
    double rate_hz = outputs::kDefaultRateHz;
    bool json = false;  // JSON lines instead of sentences
    std::string page;   // HOST:PORT of the wall page; empty: none
    outputs::Knowledge knowledge = outputs::Knowledge::of_the_moment;
};

struct ReplayOptions {
    std::string log;
    std::string channels;  // channel map; empty: none
    bool strict = false;
    ResultOptions results;
};

struct LiveOptions {
    std::string from;     // ZeroMQ endpoint of the node
    std::string publish;  // endpoint on which the results are published; empty: none
    ResultOptions results;
};

struct ConvertOptions {
    std::string in;
    std::string out;
    std::string channels;
    bool strict = false;
};

struct SettleOptions {
    std::string log;
    std::string car;
    std::string out;       // the proposed car file; empty: only the report
    std::string channels;  // channel map; empty: none
    bool strict = false;
};

[[nodiscard]] int replay(const ReplayOptions& options);
[[nodiscard]] int live(const LiveOptions& options);
[[nodiscard]] int convert(const ConvertOptions& options);
[[nodiscard]] int settle(const SettleOptions& options);
[[nodiscard]] int keys();

}  // namespace holdfast::commands
