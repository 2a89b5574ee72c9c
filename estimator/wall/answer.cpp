// SPDX-License-Identifier: MIT
#include "estimator/wall/answer.hpp"

#include <algorithm>
#include <array>
#include <random>

namespace holdfast::wall {
namespace {

using Line = std::pair<std::string_view, std::string_view>;

constexpr std::array<Line, 7> kCommon{{
    {"Content-Security-Policy",
     "default-src 'none'; script-src 'self'; style-src 'self'; connect-src 'self'; img-src 'self' data:; "
     "frame-ancestors 'none'; base-uri 'none'; form-action 'none'"},
    {"X-Content-Type-Options", "nosniff"},
    {"Referrer-Policy", "no-referrer"},
    {"Cache-Control", "no-store"},
    {"Cross-Origin-Resource-Policy", "same-origin"},
    {"Cross-Origin-Opener-Policy", "same-origin"},
    {"X-Frame-Options", "DENY"},
}};

Answer refuse(unsigned status, std::string_view words) {
    return {.status = status, .body = words, .more = {}};
}

char lower(char c) {
    return c >= 'A' && c <= 'Z' ? static_cast<char>(c - 'A' + 'a') : c;
}

bool same_name(std::string_view a, std::string_view b) {
    if (a.size() != b.size()) return false;
    for (std::size_t i = 0; i < a.size(); ++i)
        if (lower(a[i]) != lower(b[i])) return false;
    return true;
}

// "name:port", "[::1]:port", "name": the name, without brackets.
std::string_view name_of(std::string_view host) {
    if (host.starts_with('[')) {
        const std::size_t end = host.find(']');
        return end == std::string_view::npos ? std::string_view{} : host.substr(1, end - 1);
    }
    return host.substr(0, host.find(':'));
}

bool is_ip_literal(std::string_view host, std::string_view name) {
    if (name.empty()) return false;
    const bool six = host.starts_with('[');
    return name.find_first_not_of(six ? "0123456789abcdefABCDEF:." : "0123456789.") == std::string_view::npos;
}

bool is_loopback(std::string_view host, std::string_view name) {
    if (same_name(name, "localhost")) return true;
    return host.starts_with('[') ? name == "::1" : name.starts_with("127.") && is_ip_literal(host, name);
}

// A page elsewhere can have a name of its own point here (DNS rebinding), but not a numeric address, nor the
// names that are ours.
bool host_is_ours(std::string_view host, const House& house) {
    const std::string_view name = name_of(host);
    if (is_loopback(host, name)) return true;
    if (house.loopback) return false;
    return is_ip_literal(host, name) || (!house.name.empty() && same_name(name, house.name));
}

// Takes the same time wherever the two differ.
bool equal_secrets(std::string_view a, std::string_view b) {
    if (a.size() != b.size()) return false;
    unsigned difference = 0;
    for (std::size_t i = 0; i < a.size(); ++i)
        difference |= static_cast<unsigned char>(a[i]) ^ static_cast<unsigned char>(b[i]);
    return difference == 0;
}

// The value of `name` in "a=1; b=2".
std::string_view value_of(std::string_view list, std::string_view name, std::string_view separators) {
    while (!list.empty()) {
        const std::size_t end = std::min(list.find_first_of(separators), list.size());
        std::string_view part = list.substr(0, end);
        list.remove_prefix(std::min(end + 1, list.size()));
        while (part.starts_with(' ')) part.remove_prefix(1);
        if (part.starts_with(name) && part.substr(name.size()).starts_with('='))
            return part.substr(name.size() + 1);
    }
    return {};
}

Answer file_answer(const House& house, std::string_view name) {
    const PageFile* file = find(house.files, name);
    if (file == nullptr) return refuse(404, "There is nothing here by this name.\n");
    return {.status = 200, .type = file->type, .body = file->content, .more = {}};
}

}  // namespace

std::span<const Line> common_headers() {
    return kCommon;
}

Answer answer(const Asked& asked, const House& house) {
    if (!host_is_ours(asked.host, house))
        return refuse(421, "This server does not go by that name; use its numeric address.\n");
    if (asked.method != "GET" && asked.method != "HEAD") {
        Answer no = refuse(405, "Only GET and HEAD are answered here.\n");
        no.more.emplace_back("Allow", "GET, HEAD");
        return no;
    }
    const std::size_t question = std::min(asked.target.find('?'), asked.target.size());
    const std::string_view path = asked.target.substr(0, question);
    const std::string_view query = asked.target.substr(std::min(question + 1, asked.target.size()));

    if (!house.token.empty()) {
        if (path == "/" && equal_secrets(value_of(query, "token", "&"), house.token)) {
            // Lax, not Strict: the address may have been followed from a message of a colleague, and the
            // browser then has to bring the cookie to the very next page. WebSockets from other sites do not
            // get it, and their Origin is looked at besides.
            Answer welcome = refuse(303, "");
            welcome.more.emplace_back("Location", "/");
            welcome.more.emplace_back(
                "Set-Cookie", house.cookie_name + "=" + house.token + "; HttpOnly; SameSite=Lax; Path=/");
            return welcome;
        }
        if (!equal_secrets(value_of(asked.cookie, house.cookie_name, ";"), house.token))
            return refuse(403, "Use the address with its token that the program printed when it started.\n");
    }
    if (path == kStreamPath) {
        if (!asked.upgrade) {
            Answer no = refuse(426, "Here is a WebSocket.\n");
            no.more.emplace_back("Upgrade", "websocket");
            return no;
        }
        // A browser names the page that asks; a page of another origin has no business here.
        if (asked.origin != "http://" + std::string(asked.host))
            return refuse(403, "A WebSocket is given only to this server's own page.\n");
        Answer yes;
        yes.upgrade = true;
        return yes;
    }
    if (asked.upgrade) return refuse(404, "There is no WebSocket here.\n");
    if (path == "/") return file_answer(house, "index.html");
    constexpr std::string_view kFolder = "/page/";
    return path.starts_with(kFolder) ? file_answer(house, path.substr(kFolder.size()))
                                     : refuse(404, "There is nothing here by this name.\n");
}

std::string random_token() {
    std::random_device source;  // the system's own: getrandom or the processor's
    std::string token;
    for (int i = 0; i < 4; ++i) {
        std::uint32_t word = source();
        for (int digit = 0; digit < 8; ++digit, word >>= 4U) token += "0123456789abcdef"[word & 15U];
    }
    return token;
}

}  // namespace holdfast::wall
