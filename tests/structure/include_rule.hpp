// SPDX-License-Identifier: MIT
// The rule of the house: which folder may include what. Reads `#include` lines only.
#pragma once

#include <filesystem>
#include <map>
#include <string>
#include <vector>

namespace holdfast::structure {

using Tree = std::map<std::string, std::string>;  // path from the repository's root -> text

// The sources of the product (proto, estimator, firmware_host; tests may include anything).
[[nodiscard]] Tree read_tree(const std::filesystem::path& root);

// A line for each breach: "file:line: what it includes and why it may not". Empty where the house is in
// order.
[[nodiscard]] std::vector<std::string> breaches(const Tree& tree);

}  // namespace holdfast::structure
