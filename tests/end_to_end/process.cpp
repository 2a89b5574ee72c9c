// SPDX-License-Identifier: MIT
#include "tests/end_to_end/process.hpp"

#include <fcntl.h>
#include <spawn.h>
#include <sys/wait.h>
#include <unistd.h>

#include <csignal>
#include <fstream>
#include <sstream>
#include <stdexcept>
#include <thread>

namespace holdfast::testing {
namespace {

constexpr std::chrono::milliseconds kLook{10};

// True as soon as `happened` is; false once the time is over.
template <class Happened>
bool within(std::chrono::seconds limit, Happened happened) {
    const auto end = std::chrono::steady_clock::now() + limit;
    while (!happened()) {
        if (std::chrono::steady_clock::now() > end) return false;
        std::this_thread::sleep_for(kLook);
    }
    return true;
}

}  // namespace

Process::Process(const std::string& name, const std::vector<std::string>& words,
                 const std::filesystem::path& folder)
    : out_(folder / (name + "-out")), err_(folder / (name + "-err")) {
    const std::string program = std::string(HOLDFAST_BIN_DIR) + "/" + name;
    std::vector<char*> argv{const_cast<char*>(program.c_str())};
    for (const std::string& word : words) argv.push_back(const_cast<char*>(word.c_str()));
    argv.push_back(nullptr);

    posix_spawn_file_actions_t files;
    posix_spawn_file_actions_init(&files);
    constexpr int kFresh = O_WRONLY | O_CREAT | O_TRUNC;
    posix_spawn_file_actions_addopen(&files, STDIN_FILENO, "/dev/null", O_RDONLY, 0);
    posix_spawn_file_actions_addopen(&files, STDOUT_FILENO, out_.c_str(), kFresh, 0644);
    posix_spawn_file_actions_addopen(&files, STDERR_FILENO, err_.c_str(), kFresh, 0644);
    const int failed = ::posix_spawn(&pid_, program.c_str(), &files, nullptr, argv.data(), environ);
    posix_spawn_file_actions_destroy(&files);
    if (failed != 0) throw std::runtime_error("cannot start " + program);
}

Process::~Process() {
    if (status_) return;
    ::kill(pid_, SIGKILL);
    ::waitpid(pid_, nullptr, 0);
}

void Process::send(int signal) const {
    ::kill(pid_, signal);
}

std::optional<int> Process::wait(std::chrono::seconds limit) {
    (void)within(limit, [&] {
        if (status_) return true;
        int state = 0;
        if (::waitpid(pid_, &state, WNOHANG) != pid_) return false;
        status_ = WIFEXITED(state) ? WEXITSTATUS(state) : 128 + WTERMSIG(state);
        return true;
    });
    return status_;
}

std::string Process::out() const {
    return read_file(out_);
}
std::string Process::err() const {
    return read_file(err_);
}

bool Process::says(const std::string& text, std::chrono::seconds limit) const {
    return within(limit, [&] {
        return out().find(text) != std::string::npos || err().find(text) != std::string::npos;
    });
}

Ended run(const std::string& name, const std::vector<std::string>& words,
          const std::filesystem::path& folder) {
    Process process(name, words, folder);
    const int status = process.wait().value_or(-1);
    return {status, process.out(), process.err()};
}

std::string read_file(const std::filesystem::path& path) {
    std::ifstream in(path, std::ios::binary);
    std::ostringstream text;
    text << in.rdbuf();
    return text.str();
}

}  // namespace holdfast::testing
