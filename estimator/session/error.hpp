// SPDX-License-Identifier: MIT
// What went wrong with something that was read, and where. Errors are values: nothing of this folder throws.
#pragma once

#include <cstdint>
#include <string>
#include <utility>
#include <variant>
#include <vector>

namespace holdfast::session {

struct Error {
    std::string file = {};
    std::uint64_t line = 0;    // counted from 1; 0: none
    std::uint64_t column = 0;  // cell of the row counted from 1; 0: none
    std::string name = {};     // header cell of the column, or key of a TOML file
    std::string message = {};  // what was wrong and what was expected
};

using Errors = std::vector<Error>;

// One line for a person: file, line, column or key, message.
[[nodiscard]] std::string to_string(const Error& error);
// One line each.
[[nodiscard]] std::string to_string(const Errors& errors);

// Text of the input as it may stand in a message: quoted, control characters escaped, shortened.
[[nodiscard]] std::string in_quotes(std::string_view text);
// Shortest text that reads back as the same number.
[[nodiscard]] std::string number_text(double value);
// "a, b, c".
[[nodiscard]] std::string joined(const std::vector<std::string>& parts);

// A value, or at least one error.
template <class T>
class [[nodiscard]] Result {
  public:
    Result(T value) : content_(std::move(value)) {}              // NOLINT(google-explicit-constructor)
    Result(Error error) : content_(Errors{std::move(error)}) {}  // NOLINT(google-explicit-constructor)
    Result(Errors errors) : content_(std::move(errors)) {}       // NOLINT(google-explicit-constructor)

    [[nodiscard]] explicit operator bool() const { return std::holds_alternative<T>(content_); }
    [[nodiscard]] T& operator*() { return std::get<T>(content_); }
    [[nodiscard]] const T& operator*() const { return std::get<T>(content_); }
    [[nodiscard]] T* operator->() { return &std::get<T>(content_); }
    [[nodiscard]] const T* operator->() const { return &std::get<T>(content_); }
    [[nodiscard]] const Errors& errors() const { return std::get<Errors>(content_); }

  private:
    std::variant<T, Errors> content_;
};

}  // namespace holdfast::session
