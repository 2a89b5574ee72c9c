// SPDX-License-Identifier: MIT
// Small logs for the tests of this folder.
#pragma once

#include <catch2/catch.hpp>
#include <fstream>
#include <string>
#include <utility>
#include <vector>

#include "estimator/session/log_source.hpp"
#include "tests/temp_folder.hpp"

namespace holdfast::testing {

// Only the needed channels, in SI.
inline const std::string kSmallHeader =
    "t[s],speed[m/s],load_fl[N],load_fr[N],load_rl[N],load_rr[N],flap_position[-],ride_height_front[m]";
inline const std::string kSmallRow = "50,1000,1001,2000,2001,0,0.030";  // behind the time

// `header` and a row of kSmallRow for each of `times`, with `extra` behind it.
inline std::string small_log(const std::vector<std::string>& times, const std::string& header = kSmallHeader,
                             const std::string& extra = "") {
    std::string text = header + "\n";
    for (const std::string& time : times) text += time + "," + kSmallRow + extra + "\n";
    return text;
}

inline std::string write_file(const TempFolder& folder, const std::string& name, const std::string& content) {
    const std::string path = folder / name;
    std::ofstream(path, std::ios::binary) << content;
    return path;
}

struct WholeLog {
    StreamInfo info;
    std::vector<Frame> frames;
    std::optional<session::Error> error;
    std::vector<std::string> left_out;
};

inline WholeLog read_to_end(session::LogSource& log) {
    WholeLog whole{log.info(), {}, {}, log.left_out()};
    for (Frame frame; log.next(frame);) whole.frames.push_back(frame);
    whole.error = log.error();
    return whole;
}

// The log of this text; its header has to be good.
inline WholeLog read_text(const std::string& text, const session::LogOptions& options = {}) {
    const TempFolder folder;
    auto log = session::open_log(write_file(folder, "log.csv", text), options);
    if (!log) FAIL(session::to_string(log.errors()));
    return read_to_end(**log);
}

// What opening the log of this text fails with.
inline session::Errors header_errors(const std::string& text, const session::LogOptions& options = {}) {
    const TempFolder folder;
    const auto log = session::open_log(write_file(folder, "log.csv", text), options);
    REQUIRE_FALSE(log);
    return log.errors();
}

}  // namespace holdfast::testing
