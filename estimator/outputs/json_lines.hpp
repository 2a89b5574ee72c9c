// SPDX-License-Identifier: MIT
// A run for other programs: one JSON object a line, {"closure": {...}}, {"alarm": {...}}, at the end
// {"summary": {...}}. Names and units are those of the files; what is not known is null.
#pragma once

#include <iosfwd>
#include <string>

#include "estimator/outputs/folder.hpp"
#include "estimator/outputs/sink.hpp"

namespace holdfast::outputs {

[[nodiscard]] std::string closure_json(const core::Closure& closure, double chord_m);
[[nodiscard]] std::string alarm_json(const core::Alarm& alarm, const StreamInfo& stream);

class JsonLines : public Sink {
  public:
    // The folder must stand before this sink in the run's list: its summary is what is printed at the end.
    JsonLines(std::ostream& out, const Folder& folder) : out_(out), folder_(folder) {}

    void on_closure(const core::Closure& closure) override;
    void on_alarm(const core::Alarm& alarm) override;
    void on_end(const RunEnd& end) override;

  private:
    std::ostream& out_;
    const Folder& folder_;
};

}  // namespace holdfast::outputs
