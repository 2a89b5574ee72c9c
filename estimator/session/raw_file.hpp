// SPDX-License-Identifier: MIT
// A file's bytes, block by block, each seen once; works on pipes too, since nothing seeks.
#pragma once

#include <cstdint>
#include <cstdio>
#include <memory>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "estimator/session/error.hpp"

namespace holdfast::session {

class RawFile {
  public:
    // Opens and reads the first block, so that unread() shows how the file begins.
    [[nodiscard]] static Result<RawFile> open(const std::string& path);

    [[nodiscard]] std::span<const char> unread() const {
        return {block_.data() + begin_, block_.data() + end_};
    }
    void consume(std::size_t bytes) {
        begin_ += bytes;
        consumed_ += bytes;
    }
    // Reads the next block once all is consumed; false at the end or on failure.
    bool refill();

    [[nodiscard]] const std::string& path() const { return path_; }
    // Why reading stopped before the file's end.
    [[nodiscard]] const std::optional<std::string>& failure() const { return failure_; }
    // Share of the file that has been consumed; 0 where its size is not known.
    [[nodiscard]] double progress() const;

  private:
    using Handle = std::unique_ptr<std::FILE, int (*)(std::FILE*)>;
    RawFile(std::string path, Handle file);

    std::string path_;
    Handle file_;
    std::vector<char> block_;
    std::size_t begin_ = 0;
    std::size_t end_ = 0;
    std::uint64_t consumed_ = 0;
    std::uint64_t size_ = 0;
    std::optional<std::string> failure_;
};

// A small file at once: its text.
[[nodiscard]] Result<std::string> read_text(const std::string& path);

}  // namespace holdfast::session
