// SPDX-License-Identifier: MIT
// The bytes of a log, unpacked: plain, gzip or zstd, told apart by how the file begins, not by its name.
#pragma once

#include <memory>
#include <optional>
#include <span>
#include <string>

#include "estimator/session/raw_file.hpp"

namespace holdfast::session {

class ByteSource {
  public:
    explicit ByteSource(RawFile file) : file_(std::move(file)) {}
    virtual ~ByteSource() = default;
    ByteSource(const ByteSource&) = delete;
    ByteSource& operator=(const ByteSource&) = delete;

    // Fills `into`; fewer bytes than asked for mean the end or a failure. Everything before a failure is
    // delivered.
    [[nodiscard]] virtual std::size_t read(std::span<char> into) = 0;

    // Why the bytes stopped before their end: packed data that are cut or damaged, or a read error.
    [[nodiscard]] const std::optional<std::string>& failure() const { return failure_; }
    [[nodiscard]] double progress() const { return file_.progress(); }

  protected:
    RawFile file_;
    std::optional<std::string> failure_;
};

[[nodiscard]] std::unique_ptr<ByteSource> unpack(RawFile file);

}  // namespace holdfast::session
