// SPDX-License-Identifier: MIT
#include "estimator/outputs/line_file.hpp"

#include <fcntl.h>
#include <unistd.h>

#include <cerrno>
#include <cstring>
#include <stdexcept>

namespace holdfast::outputs {
namespace {

constexpr std::size_t kBlockBytes = std::size_t{64} * 1024;

[[noreturn]] void fail(const std::filesystem::path& path, const char* doing) {
    throw std::runtime_error(path.string() + ": cannot " + doing + ": " + std::strerror(errno));
}

}  // namespace

LineFile::LineFile(std::filesystem::path path, Flush flush)
    : path_(std::move(path)),
      flush_(flush),
      descriptor_(::open(path_.c_str(), O_WRONLY | O_CREAT | O_TRUNC | O_CLOEXEC, 0644)) {
    if (descriptor_ < 0) fail(path_, "create");
}

LineFile::~LineFile() {
    try {
        flush();
    } catch (const std::runtime_error&) {
        // The writer that cares has called flush() itself and heard of it.
    }
    ::close(descriptor_);
}

void LineFile::add(std::string_view line) {
    held_ += line;
    if (flush_ == Flush::each_line || held_.size() >= kBlockBytes) flush();
}

void LineFile::flush() {
    std::size_t done = 0;
    while (done < held_.size()) {
        const ssize_t wrote = ::write(descriptor_, held_.data() + done, held_.size() - done);
        if (wrote < 0 && errno == EINTR) continue;
        if (wrote < 0) {
            held_.clear();  // not tried again: the failure has been told
            fail(path_, "write");
        }
        done += static_cast<std::size_t>(wrote);
    }
    held_.clear();
}

void write_whole(const std::filesystem::path& path, std::string_view text) {
    std::filesystem::path part = path;
    part += ".part";
    {
        LineFile file(part, LineFile::Flush::by_block);
        file.add(text);
        file.flush();
    }
    std::filesystem::rename(part, path);
}

}  // namespace holdfast::outputs
