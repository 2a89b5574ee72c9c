// SPDX-License-Identifier: MIT
#include "proto/in_file.hpp"

#include <fcntl.h>
#include <sys/stat.h>
#include <unistd.h>

#include <algorithm>
#include <cerrno>
#include <cstring>
#include <utility>

namespace holdfast::proto {
namespace {

constexpr std::size_t kReadAheadBytes = 1U << 20U;

}  // namespace

Result<InFile> InFile::open(const std::string& path) {
    const int descriptor = ::open(path.c_str(), O_RDONLY | O_CLOEXEC);
    if (descriptor < 0) return Error{path, 0, std::string("cannot be opened: ") + std::strerror(errno)};
    struct stat status = {};
    if (::fstat(descriptor, &status) != 0 || !S_ISREG(status.st_mode)) {
        ::close(descriptor);
        return Error{path, 0, "is no regular file, which a recording has to be"};
    }
    return InFile(path, descriptor, static_cast<std::uint64_t>(status.st_size));
}

InFile::InFile(std::string path, int descriptor, std::uint64_t size)
    : path_(std::move(path)), descriptor_(descriptor), size_(size) {}

InFile::~InFile() {
    if (descriptor_ >= 0) ::close(descriptor_);
}

InFile::InFile(InFile&& other) noexcept
    : path_(std::move(other.path_)),
      descriptor_(std::exchange(other.descriptor_, -1)),
      size_(other.size_),
      buffer_(std::move(other.buffer_)),
      buffer_offset_(other.buffer_offset_),
      buffer_bytes_(other.buffer_bytes_),
      failure_(std::move(other.failure_)) {}

InFile& InFile::operator=(InFile&& other) noexcept {
    InFile taken(std::move(other));
    std::swap(path_, taken.path_);
    std::swap(descriptor_, taken.descriptor_);
    std::swap(size_, taken.size_);
    std::swap(buffer_, taken.buffer_);
    std::swap(buffer_offset_, taken.buffer_offset_);
    std::swap(buffer_bytes_, taken.buffer_bytes_);
    std::swap(failure_, taken.failure_);
    return *this;
}

std::string_view InFile::view(std::uint64_t offset, std::size_t count) {
    if (offset >= size_) return {};
    count = static_cast<std::size_t>(std::min<std::uint64_t>(count, size_ - offset));
    if (offset < buffer_offset_ || offset + count > buffer_offset_ + buffer_bytes_) fill(offset, count);
    const std::size_t begin = static_cast<std::size_t>(offset - buffer_offset_);
    return std::string_view(buffer_.data() + begin, std::min(count, buffer_bytes_ - begin));
}

void InFile::fill(std::uint64_t offset, std::size_t count) {
    const std::size_t wanted =
        static_cast<std::size_t>(std::min<std::uint64_t>(std::max(count, kReadAheadBytes), size_ - offset));
    if (buffer_.size() < wanted) buffer_.resize(wanted);
    buffer_offset_ = offset;
    buffer_bytes_ = 0;
    while (buffer_bytes_ < wanted) {
        const ssize_t got = ::pread(descriptor_, buffer_.data() + buffer_bytes_, wanted - buffer_bytes_,
                                    static_cast<off_t>(offset + buffer_bytes_));
        if (got < 0 && errno == EINTR) continue;
        if (got < 0) failure_ = std::string("cannot be read: ") + std::strerror(errno);
        if (got <= 0) return;
        buffer_bytes_ += static_cast<std::size_t>(got);
    }
}

}  // namespace holdfast::proto
