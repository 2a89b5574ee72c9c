// SPDX-License-Identifier: MIT
// A TOML file as a flat list of its keys, each with its line: all that the readers of this folder need of
// TOML.
#pragma once

#include <cstdint>
#include <string>
#include <variant>
#include <vector>

#include "estimator/session/error.hpp"

namespace holdfast::session {

struct TomlTable {};
struct TomlOther {
    std::string type;  // boolean, date, array, ...
};

struct TomlEntry {
    std::vector<std::string> path;  // [car] mass = 700 is {"car", "mass"}
    std::uint64_t line = 0;
    std::variant<TomlTable, double, std::string, TomlOther> value;

    [[nodiscard]] const double* number() const { return std::get_if<double>(&value); }
    [[nodiscard]] const std::string* text() const { return std::get_if<std::string>(&value); }
    [[nodiscard]] bool is_table() const { return std::holds_alternative<TomlTable>(value); }
    [[nodiscard]] std::string key() const;  // "car.mass"
};

// What was found, for a message: "a table", "the text "heavy"", "the number 3".
[[nodiscard]] std::string describe(const TomlEntry& entry);

// In the order of the file, a table before what is in it. Errors: the file cannot be read, or is not TOML.
[[nodiscard]] Result<std::vector<TomlEntry>> read_toml_file(const std::string& path);

}  // namespace holdfast::session
