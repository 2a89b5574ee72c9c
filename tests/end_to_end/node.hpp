// SPDX-License-Identifier: MIT
// `carnode play` on a free loopback port.
#pragma once

#include <filesystem>
#include <stdexcept>
#include <string>

#include "tests/end_to_end/logs.hpp"
#include "tests/end_to_end/process.hpp"

namespace holdfast::testing {

class Node {
  public:
    Node(const std::string& log, const std::string& pace, const std::filesystem::path& folder)
        : process_("carnode",
                   {"play", log, "--car", demo_car(), "--bind", "tcp://127.0.0.1:*", "--pace", pace},
                   folder) {
        constexpr const char* kScheme = "tcp://127.0.0.1:";
        if (!process_.says(kScheme)) throw std::runtime_error("carnode does not say where it sends");
        const std::string said = process_.err() + process_.out();
        const std::size_t begin = said.find(kScheme);
        endpoint_ = said.substr(begin, said.find_first_of(" \n", begin) - begin);
    }

    [[nodiscard]] const std::string& endpoint() const { return endpoint_; }

  private:
    Process process_;
    std::string endpoint_;
};

}  // namespace holdfast::testing
