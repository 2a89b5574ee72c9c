// SPDX-License-Identifier: MIT
#include "estimator/session/car_file_edit.hpp"

#include <cstdio>
#include <optional>
#include <string_view>

#include "estimator/session/raw_file.hpp"
#include "estimator/session/toml_file.hpp"

namespace holdfast::session {
namespace {

// Six digits: far finer than any of these values is known.
std::string written(double value) {
    char text[32];
    std::snprintf(text, sizeof text, "%.6g", value);
    return text;
}

Result<std::vector<std::string>> lines_of(const std::string& path) {
    const Result<std::string> text = read_text(path);
    if (!text) return text.errors();
    std::vector<std::string> lines(1);
    for (const char c : *text) {
        if (c == '\n') {
            lines.emplace_back();
        } else {
            lines.back() += c;
        }
    }
    return lines;
}

// A key and its number within a line: key = number.
struct Place {
    std::size_t key_begin = 0;  // of the dotted key, quotes included
    std::size_t number_begin = 0;
    std::size_t number_end = 0;
};

bool is_blank(char c) {
    return c == ' ' || c == '\t';
}
bool belongs_to_key(char c) {
    return c != ' ' && c != '\t' && c != '{' && c != ',' && c != '=';
}

std::optional<Place> find_key(std::string_view line, std::string_view key) {
    for (std::size_t at = line.find(key); at != std::string_view::npos; at = line.find(key, at + 1)) {
        std::size_t end = at + key.size();
        const bool quoted = at > 0 && end < line.size() && (line[end] == '"' || line[end] == '\'') &&
                            line[at - 1] == line[end];
        if (quoted) ++end;
        const std::size_t begin = quoted ? at - 1 : at;
        const bool begins = begin == 0 || !belongs_to_key(line[begin - 1]) || line[begin - 1] == '.';
        while (end < line.size() && is_blank(line[end])) ++end;
        if (!begins || end >= line.size() || line[end] != '=') continue;
        Place place;
        place.key_begin = begin;
        while (place.key_begin > 0 && belongs_to_key(line[place.key_begin - 1])) --place.key_begin;
        place.number_begin = end + 1;
        while (place.number_begin < line.size() && is_blank(line[place.number_begin])) ++place.number_begin;
        place.number_end = line.find_first_of(" \t\r,}#", place.number_begin);
        if (place.number_end == std::string_view::npos) place.number_end = line.size();
        return place;
    }
    return std::nullopt;
}

// At the end of the line, before a carriage return.
void remark(std::string& line, const std::string& what) {
    const bool carriage_return = line.ends_with('\r');
    if (carriage_return) line.pop_back();
    line += (line.find('#') == std::string::npos ? "  # " : "; ") + what + (carriage_return ? "\r" : "");
}

class Editor {
  public:
    Editor(std::string path, std::vector<std::string> lines, std::vector<TomlEntry> entries)
        : path_(std::move(path)), lines_(std::move(lines)), entries_(std::move(entries)) {}

    std::optional<Error> change(const CarFileChange& change) {
        const std::string full = change.table + "." + change.key;
        if (const auto error = replace(full, change.key, change.value.value)) return error;
        const std::string sd = change.key + "_sd";
        if (find(full + "_sd") != nullptr) return replace(full + "_sd", sd, change.value.sd);
        return add_beside(full, change.key, sd, change.value.sd);
    }

    std::string text() const {
        std::string out;
        for (std::size_t i = 0; i < lines_.size(); ++i) {
            if (i > 0) out += '\n';
            out += lines_[i];
            for (const std::string& added : added_[i]) out += '\n' + added;
        }
        return out;
    }

  private:
    const TomlEntry* find(const std::string& full) const {
        for (const TomlEntry& entry : entries_)
            if (entry.key() == full) return &entry;
        return nullptr;
    }

    Error wrong(const std::string& full, std::uint64_t line, std::string message) const {
        return {.file = path_, .line = line, .name = full, .message = std::move(message)};
    }

    std::optional<Error> replace(const std::string& full, const std::string& key, double value) {
        const TomlEntry* entry = find(full);
        if (entry == nullptr) return wrong(full, 0, "missing; expected a value to change");
        std::string& line = lines_[entry->line - 1];
        const auto place = find_key(line, key);
        if (!place) return wrong(full, entry->line, "cannot be changed; expected `key = number` in one line");
        const std::string before = line.substr(place->number_begin, place->number_end - place->number_begin);
        line.replace(place->number_begin, before.size(), written(value));
        remark(line, key + " was " + before);
        return std::nullopt;
    }

    // A line of its own; within braces, behind the value.
    std::optional<Error> add_beside(const std::string& full, const std::string& key, const std::string& sd,
                                    double value) {
        const std::size_t i = find(full)->line - 1;
        const Place place = *find_key(lines_[i], key);
        const std::string before = lines_[i].substr(0, place.key_begin);
        const bool in_braces = before.find_first_not_of(" \t") != std::string::npos;
        if (in_braces) {
            lines_[i].insert(place.number_end, ", " + sd + " = " + written(value));
            remark(lines_[i], sd + " was not given");
            return std::nullopt;
        }
        std::string written_key = lines_[i].substr(place.key_begin);
        written_key.resize(written_key.find(key));  // what stands before a dotted key's last part
        if (written_key.ends_with('"') || written_key.ends_with('\'')) written_key.pop_back();
        std::string line = before + written_key + sd + " = " + written(value);
        if (lines_[i].ends_with('\r')) line += '\r';
        remark(line, "was not given");
        added_[i].push_back(line);
        return std::nullopt;
    }

    std::string path_;
    std::vector<std::string> lines_;
    std::vector<TomlEntry> entries_;
    std::vector<std::vector<std::string>> added_{lines_.size()};  // after each line
};

}  // namespace

Result<std::string> changed_car_file(const std::string& path, const std::vector<CarFileChange>& changes) {
    auto entries = read_toml_file(path);
    if (!entries) return entries.errors();
    auto lines = lines_of(path);
    if (!lines) return lines.errors();
    Editor editor(path, std::move(*lines), std::move(*entries));
    for (const CarFileChange& change : changes)
        if (auto error = editor.change(change)) return std::move(*error);
    return editor.text();
}

}  // namespace holdfast::session
