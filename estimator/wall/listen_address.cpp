// SPDX-License-Identifier: MIT
#include "estimator/wall/listen_address.hpp"

#include <charconv>
#include <stdexcept>

namespace holdfast::wall {

ListenAddress listen_address(std::string_view text) {
    const auto fail = [&](const char* expected) {
        throw std::runtime_error("page address '" + std::string(text) + "': " + expected);
    };
    const std::size_t colon = text.rfind(':');
    if (colon == std::string_view::npos || colon == 0) fail("HOST:PORT expected, e.g. 127.0.0.1:8080");
    std::string_view host = text.substr(0, colon);
    if (host.starts_with('[') && host.ends_with(']')) {
        host = host.substr(1, host.size() - 2);
    } else if (host.find(':') != std::string_view::npos) {
        fail("an IPv6 address stands in brackets, e.g. [::1]:8080");
    }
    ListenAddress address{std::string(host), 0};
    const std::string_view port = text.substr(colon + 1);
    const auto [end, error] = std::from_chars(port.data(), port.data() + port.size(), address.port);
    if (error != std::errc{} || end != port.data() + port.size())
        fail("the port is a number from 0 to 65535");
    return address;
}

}  // namespace holdfast::wall
