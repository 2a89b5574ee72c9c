// SPDX-License-Identifier: MIT
// A file to write, packed by its name: .gz gzip, .zst zstd, else plain.
#pragma once

#include <cstdio>
#include <memory>
#include <optional>
#include <span>
#include <string>

#include "estimator/session/error.hpp"

namespace holdfast::session {

class ByteSink {
  public:
    [[nodiscard]] static Result<std::unique_ptr<ByteSink>> create(const std::string& path);
    virtual ~ByteSink() = default;
    ByteSink(const ByteSink&) = delete;
    ByteSink& operator=(const ByteSink&) = delete;

    // Set: the bytes could not be written, e.g. since the disk is full.
    [[nodiscard]] virtual std::optional<Error> write(std::span<const char> bytes) = 0;
    // Ends packed data and closes; without it the file is cut.
    [[nodiscard]] virtual std::optional<Error> finish() = 0;

  protected:
    using Handle = std::unique_ptr<std::FILE, int (*)(std::FILE*)>;
    ByteSink(std::string path, Handle file);
    [[nodiscard]] std::optional<Error> put(std::span<const char> bytes);
    [[nodiscard]] std::optional<Error> close();
    [[nodiscard]] Error failed(const std::string& why) const;

  private:
    std::string path_;
    Handle file_;
};

}  // namespace holdfast::session
