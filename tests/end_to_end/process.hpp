// SPDX-License-Identifier: MIT
// A program of ours, started as a person would start it.
#pragma once

#include <sys/types.h>

#include <chrono>
#include <filesystem>
#include <optional>
#include <string>
#include <vector>

namespace holdfast::testing {

class Process {
  public:
    // Starts bin/NAME of this build. Its standard output and error go to the files NAME-out and NAME-err in
    // `folder`.
    Process(const std::string& name, const std::vector<std::string>& words,
            const std::filesystem::path& folder);
    ~Process();  // ends it, where it still runs
    Process(const Process&) = delete;
    Process& operator=(const Process&) = delete;

    void send(int signal) const;
    // Exit status; 128 + signal where a signal ended it; nothing where it did not end in time.
    [[nodiscard]] std::optional<int> wait(std::chrono::seconds limit = std::chrono::seconds(120));

    [[nodiscard]] std::string out() const;
    [[nodiscard]] std::string err() const;
    // Waits until its output or error holds `text`; false where that does not come in time.
    [[nodiscard]] bool says(const std::string& text,
                            std::chrono::seconds limit = std::chrono::seconds(60)) const;

  private:
    std::filesystem::path out_;
    std::filesystem::path err_;
    pid_t pid_ = -1;
    std::optional<int> status_;
};

// Start and wait.
struct Ended {
    int status = -1;  // -1: did not end in time
    std::string out;
    std::string err;
};
[[nodiscard]] Ended run(const std::string& name, const std::vector<std::string>& words,
                        const std::filesystem::path& folder);

// The whole text of a file; empty where there is none.
[[nodiscard]] std::string read_file(const std::filesystem::path& path);

}  // namespace holdfast::testing
