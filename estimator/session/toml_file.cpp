// SPDX-License-Identifier: MIT
#include "estimator/session/toml_file.hpp"

#include <algorithm>
#include <optional>
#include <sstream>
#include <string_view>
#include <utility>

#define TOML_HEADER_ONLY 1
#define TOML_EXCEPTIONS 0
#include <toml++/toml.h>

#include "estimator/session/raw_file.hpp"

namespace holdfast::session {
namespace {

using Path = std::vector<std::string>;

std::string type_name(const toml::node& node) {
    std::ostringstream name;
    name << node.type();
    return name.str();
}

// Nodes in the order in which they stand in the file: the library keeps a table sorted by name.
std::vector<std::pair<std::string, const toml::node*>> in_file_order(const toml::table& table) {
    std::vector<std::pair<std::string, const toml::node*>> nodes;
    for (const auto& [key, node] : table) nodes.emplace_back(key.str(), &node);
    std::stable_sort(nodes.begin(), nodes.end(), [](const auto& a, const auto& b) {
        return a.second->source().begin < b.second->source().begin;
    });
    return nodes;
}

void flatten(const toml::table& table, const Path& path, std::vector<TomlEntry>& into) {
    for (const auto& [key, node] : in_file_order(table)) {
        TomlEntry entry{path, node->source().begin.line, TomlTable{}};
        entry.path.push_back(key);
        if (const toml::table* inner = node->as_table()) {
            const Path inner_path = entry.path;
            into.push_back(std::move(entry));
            flatten(*inner, inner_path, into);
            continue;
        }
        if (node->is_number()) {
            entry.value = node->value<double>().value_or(0.0);
        } else if (const auto text = node->value<std::string>(); node->is_string() && text) {
            entry.value = *text;
        } else {
            entry.value = TomlOther{type_name(*node)};
        }
        into.push_back(std::move(entry));
    }
}

// TOML allows other characters than ASCII only in comments and strings. toml++ 3.3 has undefined behaviour
// over some of them elsewhere (its issues 190 and 295), so that it must not see such a file.
std::optional<std::size_t> find_stray_character(std::string_view text) {
    constexpr std::string_view kByteOrderMark = "\xef\xbb\xbf";
    std::string_view closing;  // of the string at `at`; empty: in none
    for (std::size_t at = text.starts_with(kByteOrderMark) ? kByteOrderMark.size() : 0; at < text.size();
         ++at) {
        const std::string_view rest = text.substr(at);
        const bool in_string = !closing.empty();
        if (in_string && closing[0] == '"' && rest[0] == '\\') {
            ++at;  // what is escaped ends nothing
        } else if (in_string && rest.starts_with(closing)) {
            at += closing.size() - 1;
            closing = {};
        } else if (in_string) {
            if (rest[0] == '\n' && closing.size() == 1) closing = {};
        } else if (rest[0] == '#') {
            at = std::min(text.find('\n', at), text.size() - 1);
        } else if (rest.starts_with("\"\"\"") || rest.starts_with("'''")) {
            closing = rest.substr(0, 3);
            at += 2;
        } else if (rest[0] == '"' || rest[0] == '\'') {
            closing = rest.substr(0, 1);
        } else if (static_cast<unsigned char>(rest[0]) >= 0x80) {
            return at;
        }
    }
    return std::nullopt;
}

}  // namespace

std::string TomlEntry::key() const {
    std::string joined_path;
    for (const std::string& part : path) joined_path += (joined_path.empty() ? "" : ".") + part;
    return joined_path;
}

std::string describe(const TomlEntry& entry) {
    if (const double* number = entry.number()) return "the number " + number_text(*number);
    if (const std::string* text = entry.text()) return "the text " + in_quotes(*text);
    if (entry.is_table()) return "a table";
    return "a value of type " + std::get<TomlOther>(entry.value).type;
}

Result<std::vector<TomlEntry>> read_toml_file(const std::string& path) {
    const Result<std::string> read = read_text(path);
    if (!read) return read.errors();
    const std::string& text = *read;

    if (const auto stray = find_stray_character(text)) {
        const auto line_breaks =
            std::count(text.begin(), text.begin() + static_cast<std::ptrdiff_t>(*stray), '\n');
        const std::size_t line_end = std::min(text.find('\n', *stray), text.size());
        return Error{
            .file = path,
            .line = static_cast<std::uint64_t>(line_breaks) + 1,
            .message = "not TOML at " + in_quotes(text.substr(*stray, line_end - *stray)) +
                       "; expected letters with accents, signs like µ and the like only within quotes"};
    }
    const toml::parse_result parsed = toml::parse(text, path);
    if (!parsed) {
        const toml::parse_error& error = parsed.error();
        return Error{.file = path,
                     .line = error.source().begin.line,
                     .message = "not TOML at character " + std::to_string(error.source().begin.column) +
                                ": " + std::string(error.description())};
    }
    std::vector<TomlEntry> entries;
    flatten(parsed.table(), {}, entries);
    return entries;
}

}  // namespace holdfast::session
