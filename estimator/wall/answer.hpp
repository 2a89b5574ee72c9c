// SPDX-License-Identifier: MIT
// What the server answers to a request, before anything is written: who may see the wall and what there is.
// No sockets here.
#pragma once

#include <cstdint>
#include <span>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

#include "estimator/wall/page_file.hpp"

namespace holdfast::wall {

// The parts of a request that matter; views into it. Empty where it has no such line.
struct Asked {
    std::string_view method;
    std::string_view target;
    std::string_view host;
    std::string_view origin;
    std::string_view cookie;
    bool upgrade = false;  // to a WebSocket
};

struct Answer {
    unsigned status = 200;
    bool upgrade = false;  // take the WebSocket
    std::string_view type = "text/plain; charset=utf-8";
    std::string_view body;
    std::vector<std::pair<std::string, std::string>> more;  // header lines beside those of every answer
};

// Where the wall listens and to whom it speaks.
struct House {
    std::span<const PageFile> files;
    bool loopback = true;     // reached from this machine only
    std::string name;         // that the person gave it or the machine has; a Host by this name is right
    std::string token;        // asked for where it is not empty
    std::string cookie_name;  // that holds it
};

inline constexpr std::string_view kStreamPath = "/wall/stream";

[[nodiscard]] Answer answer(const Asked& asked, const House& house);

// Header lines of every answer: nothing from elsewhere, nothing embedded elsewhere, nothing kept.
[[nodiscard]] std::span<const std::pair<std::string_view, std::string_view>> common_headers();

// 128 random bits in hexadecimal.
[[nodiscard]] std::string random_token();

}  // namespace holdfast::wall
