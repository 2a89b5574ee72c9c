// SPDX-License-Identifier: MIT
// A value, or what was wrong with the bytes that it should have come from. Nothing of this folder throws over
// bad input.
#pragma once

#include <cstdint>
#include <string>
#include <utility>
#include <variant>

namespace holdfast::proto {

struct Error {
    std::string file = {};     // empty: not from a file
    std::uint64_t offset = 0;  // byte of the file at which it was noticed
    std::string message = {};  // what was wrong and what was expected
};

// One line for a person: "outing.hfr, byte 1234: ...".
[[nodiscard]] std::string to_string(const Error& error);

template <class T>
class [[nodiscard]] Result {
  public:
    Result(T value) : content_(std::move(value)) {}      // NOLINT(google-explicit-constructor)
    Result(Error error) : content_(std::move(error)) {}  // NOLINT(google-explicit-constructor)

    [[nodiscard]] explicit operator bool() const { return std::holds_alternative<T>(content_); }
    [[nodiscard]] T& operator*() { return std::get<T>(content_); }
    [[nodiscard]] const T& operator*() const { return std::get<T>(content_); }
    [[nodiscard]] T* operator->() { return &std::get<T>(content_); }
    [[nodiscard]] const T* operator->() const { return &std::get<T>(content_); }
    [[nodiscard]] const Error& error() const { return std::get<Error>(content_); }

  private:
    std::variant<T, Error> content_;
};

}  // namespace holdfast::proto
