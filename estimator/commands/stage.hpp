// SPDX-License-Identifier: MIT
// One stream into one folder of results: the run, its files, and what is shown of it on the terminal. Replay
// and live put their frames through this same object.
#pragma once

#include <filesystem>
#include <memory>
#include <optional>
#include <string>

#include "estimator/commands/commands.hpp"
#include "estimator/outputs/folder.hpp"
#include "estimator/outputs/json_lines.hpp"
#include "estimator/outputs/run.hpp"
#include "estimator/outputs/terminal.hpp"
#include "estimator/session/bind.hpp"
#include "estimator/session/car_file.hpp"
#include "estimator/wall/observer.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::commands {

// Where the frames come from, in words.
struct Input {
    std::string name;  // file or endpoint
    bool live = false;
    std::uint32_t stream = 1;  // counts the node's restarts
};

class Stage {
  public:
    // `also` listens too, where it is not null; it and the wall must
    // outlive the stage. Throws std::runtime_error where the folder cannot be written.
    Stage(const session::CarFile& car_file, const session::BoundCar& bound, const StreamInfo& stream,
          const Input& input, const std::filesystem::path& folder, const ResultOptions& options,
          wall::Wall& wall, outputs::Sink* also);

    void step(Frame& frame);
    void finish(bool complete, const std::string& reason = {});

    // An alarm from outside the engine, such as silence by the receiver's clock. Shown, counted and handed
    // on; the closures and estimates know nothing of it.
    void raise(const core::Alarm& alarm);

    // A remark for a person, on standard error.
    void remark(const std::string& line);
    void set_progress(double share) { terminal_.set_progress(share); }
    // For the page, between frames: acknowledgements in, the link's state out.
    void attend_page() { observer_.poll(); }
    void show_link(const wall::LinkStatus& link) { observer_.set_link(link); }
    void set_link_counters(outputs::LinkCounters counters) { folder_.set_link_counters(std::move(counters)); }

  private:
    session::FrameAdapter adapter_;
    outputs::Folder folder_;
    outputs::Terminal terminal_;
    outputs::JsonLines json_lines_;
    wall::Observer observer_;
    std::vector<outputs::Sink*> sinks_;
    outputs::Run run_;
};

// The car file, or nothing: its errors have been told on standard error.
[[nodiscard]] std::optional<session::CarFile> read_car(const std::string& path);
// The car bound to the stream, likewise; what the stream lacks or has beyond the car is told as a note.
[[nodiscard]] std::optional<session::BoundCar> bind(const session::CarFile& car_file,
                                                    const StreamInfo& stream);

// Opens the page where one is asked for, and says on standard error where it is. Throws std::runtime_error.
void open_page(wall::Wall& wall, const ResultOptions& options);

// "error: ..." on standard error, a line each.
void tell(const session::Errors& errors);

}  // namespace holdfast::commands
