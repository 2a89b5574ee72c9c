// SPDX-License-Identifier: MIT
// A file's bytes at any place, through one buffer.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "proto/result.hpp"

namespace holdfast::proto {

class InFile {
  public:
    [[nodiscard]] static Result<InFile> open(const std::string& path);
    ~InFile();
    InFile(InFile&& other) noexcept;
    InFile& operator=(InFile&& other) noexcept;

    // The bytes from `offset`, fewer than `count` where the file ends before. Good until the next call.
    [[nodiscard]] std::string_view view(std::uint64_t offset, std::size_t count);

    // When the file was opened: what a writer adds later is not seen.
    [[nodiscard]] std::uint64_t size() const { return size_; }
    [[nodiscard]] const std::string& path() const { return path_; }
    // Set where the system could not read bytes that are there.
    [[nodiscard]] const std::optional<std::string>& failure() const { return failure_; }

  private:
    InFile(std::string path, int descriptor, std::uint64_t size);
    void fill(std::uint64_t offset, std::size_t count);

    std::string path_;
    int descriptor_;
    std::uint64_t size_;
    std::vector<char> buffer_;
    std::uint64_t buffer_offset_ = 0;
    std::size_t buffer_bytes_ = 0;
    std::optional<std::string> failure_;
};

}  // namespace holdfast::proto
