// SPDX-License-Identifier: MIT
// A run in a person's words: a line for each closing, a line for each alarm the moment it comes, a summary at
// the end. Numbers carry their unit and their uncertainty (one standard uncertainty after ±).
#pragma once

#include <chrono>
#include <cstdint>
#include <iosfwd>
#include <string>

#include "estimator/outputs/folder.hpp"
#include "estimator/outputs/sink.hpp"

namespace holdfast::outputs {

[[nodiscard]] std::string closure_line(const core::Closure& closure);
// What the alarm says, without its time.
[[nodiscard]] std::string alarm_words(const core::Alarm& alarm, const StreamInfo& stream);
[[nodiscard]] std::string alarm_line(const core::Alarm& alarm, const StreamInfo& stream);
// Several lines: what was seen, what the numbers refer to, what is not to be relied on, where the files lie.
[[nodiscard]] std::string summary_lines(const Folder& folder, const RunEnd& end);

enum class Style : std::uint8_t { plain, colour };

class Terminal : public Sink {
  public:
    // `out` gets the lines; `status` gets a line that is written over itself, or nothing where it is null (it
    // is given only where it is a terminal). The folder's tally is shown at the end; it must stand before
    // this sink in the run's list.
    Terminal(std::ostream& out, std::ostream* status, Style style, const Folder& folder);

    void on_estimate(const core::Estimate& estimate) override;
    void on_closure(const core::Closure& closure) override;
    void on_alarm(const core::Alarm& alarm) override;
    void on_end(const RunEnd& end) override;

    // Takes the status line away, so that something else may be written.
    void clear_status();
    // Share of the input that has been read, 0 to 1; negative where it is not known.
    void set_progress(double share) { progress_ = share; }

  private:
    void say(const std::string& line);
    void show_status(const core::Estimate& estimate);

    std::ostream& out_;
    std::ostream* status_;
    Style style_;
    const Folder& folder_;
    double progress_ = -1.0;
    bool status_shown_ = false;
    std::chrono::steady_clock::time_point next_status_{};  // the reader's clock, for the status line only
};

}  // namespace holdfast::outputs
