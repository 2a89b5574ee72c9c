// SPDX-License-Identifier: MIT
// HOST:PORT as a person writes it.
#pragma once

#include <cstdint>
#include <string>
#include <string_view>

namespace holdfast::wall {

struct ListenAddress {
    std::string host;  // without brackets
    std::uint16_t port = 0;
};

// Throws std::runtime_error that says what was expected.
[[nodiscard]] ListenAddress listen_address(std::string_view text);

}  // namespace holdfast::wall
