// SPDX-License-Identifier: MIT
#include "estimator/session/raw_file.hpp"

#include <algorithm>
#include <cerrno>
#include <cstring>
#include <filesystem>
#include <utility>

namespace holdfast::session {
namespace {
constexpr std::size_t kBlockBytes = std::size_t{256} * 1024;
}

RawFile::RawFile(std::string path, Handle file)
    : path_(std::move(path)), file_(std::move(file)), block_(kBlockBytes) {
    std::error_code unknown_size;
    const auto size = std::filesystem::file_size(path_, unknown_size);
    size_ = unknown_size ? 0 : size;
}

Result<RawFile> RawFile::open(const std::string& path) {
    Handle handle(std::fopen(path.c_str(), "rb"), &std::fclose);
    if (!handle) {
        return Error{.file = path,
                     .message = std::string("cannot be opened: ") + std::strerror(errno) +
                                "; expected a file that can be read"};
    }
    RawFile file(path, std::move(handle));
    file.refill();
    if (file.failure_) return Error{.file = path, .message = *file.failure_};
    return file;
}

bool RawFile::refill() {
    begin_ = 0;
    end_ = std::fread(block_.data(), 1, block_.size(), file_.get());
    if (end_ == 0 && std::ferror(file_.get()) != 0) {
        failure_ =
            std::string("cannot be read: ") + std::strerror(errno) + "; expected a file that can be read";
    }
    return end_ > 0;
}

double RawFile::progress() const {
    if (size_ == 0) return 0.0;
    return std::min(1.0, static_cast<double>(consumed_) / static_cast<double>(size_));
}

Result<std::string> read_text(const std::string& path) {
    Result<RawFile> file = RawFile::open(path);
    if (!file) return file.errors();
    std::string text;
    do {
        text.append(file->unread().begin(), file->unread().end());
    } while (file->refill());
    if (file->failure()) return Error{.file = path, .message = *file->failure()};
    return text;
}

}  // namespace holdfast::session
