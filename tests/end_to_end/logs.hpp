// SPDX-License-Identifier: MIT
// The bundled outing that these tests run on, whole and spoilt.
#pragma once

#include <cstddef>
#include <filesystem>
#include <string>
#include <vector>

#include "tests/temp_folder.hpp"

namespace holdfast::testing {

// Log and car file of the bundled demonstration outing.
[[nodiscard]] std::string demo_log();
[[nodiscard]] std::string demo_car();

// The words of `holdfast live` that listens to a node which plays it.
[[nodiscard]] std::vector<std::string> live_words(const std::string& endpoint, const std::string& out);

// The outing's first `seconds` of source time as a CSV log in `folder`, and its path.
[[nodiscard]] std::string first_seconds(double seconds, const TempFolder& folder);

// `summary.json` of a results folder: whether the input was complete, and why not.
struct Completeness {
    bool complete = true;
    std::string reason;
    std::size_t closings = 0;
};
[[nodiscard]] Completeness completeness(const std::filesystem::path& results);

}  // namespace holdfast::testing
