// SPDX-License-Identifier: MIT
#include "proto/result.hpp"

namespace holdfast::proto {

std::string to_string(const Error& error) {
    if (error.file.empty()) return error.message;
    return error.file + ", byte " + std::to_string(error.offset) + ": " + error.message;
}

}  // namespace holdfast::proto
