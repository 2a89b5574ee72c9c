// SPDX-License-Identifier: MIT
#include "estimator/session/error.hpp"

#include <array>
#include <charconv>
#include <cstdio>

namespace holdfast::session {

std::string to_string(const Error& error) {
    std::string text = error.file;
    if (error.line > 0) text += ", line " + std::to_string(error.line);
    if (error.column > 0) {
        text += ", column " + std::to_string(error.column);
        if (!error.name.empty()) text += " " + in_quotes(error.name);
    } else if (!error.name.empty()) {
        text += ", key " + in_quotes(error.name);
    }
    if (!text.empty()) text += ": ";
    return text + error.message;
}

std::string to_string(const Errors& errors) {
    std::string text;
    for (const Error& error : errors) text += to_string(error) + "\n";
    return text;
}

std::string in_quotes(std::string_view text) {
    constexpr std::size_t kLongest = 60;
    std::string shown = "\"";
    for (const char c : text.substr(0, kLongest)) {
        const auto byte = static_cast<unsigned char>(c);
        if (byte < 0x20 || byte == 0x7f) {
            std::array<char, 8> escape{};
            std::snprintf(escape.data(), escape.size(), "\\x%02x", byte);
            shown += escape.data();
        } else {
            shown += c;
        }
    }
    return shown + (text.size() > kLongest ? "...\"" : "\"");
}

std::string number_text(double value) {
    std::array<char, 32> digits{};
    const auto written = std::to_chars(digits.data(), digits.data() + digits.size(), value);
    return {digits.data(), written.ptr};
}

std::string joined(const std::vector<std::string>& parts) {
    std::string text;
    for (const std::string& part : parts) text += (text.empty() ? "" : ", ") + part;
    return text;
}

}  // namespace holdfast::session
