// SPDX-License-Identifier: MIT
#include "tests/structure/include_rule.hpp"

#include <algorithm>
#include <fstream>
#include <regex>
#include <sstream>
#include <string_view>

namespace holdfast::structure {
namespace {

struct Room {
    std::string_view folder;                    // or one file
    std::vector<std::string_view> may_include;  // folders or files; its own folder always
};

// The simulated car (firmware_host/car) and the estimator share the vocabulary and nothing else: otherwise
// the filter would be tested against itself.
const std::vector<Room> kRooms{
    {"proto/vocabulary", {}},
    {"proto", {"proto/vocabulary", "estimator/core/results.hpp"}},
    {"estimator/core", {"proto/vocabulary"}},
    {"estimator/session", {"proto", "proto/vocabulary", "estimator/core/car.hpp"}},
    {"estimator/link", {"proto", "proto/vocabulary"}},
    {"estimator/outputs", {"proto", "proto/vocabulary", "estimator/core", "estimator/session"}},
    {"estimator/wall",
     {"proto", "proto/vocabulary", "estimator/core", "estimator/session", "estimator/outputs"}},
    {"estimator/commands",
     {"proto", "proto/vocabulary", "estimator/core", "estimator/session", "estimator/link",
      "estimator/outputs", "estimator/wall"}},
    {"estimator/holdfast.cpp", {"estimator/commands", "proto/vocabulary"}},
    {"firmware_host/car", {"proto/vocabulary"}},
    {"firmware_host/node",
     {"proto", "proto/vocabulary", "estimator/session", "estimator/link", "firmware_host/car"}},
    {"firmware_host/carnode.cpp", {"firmware_host/node", "proto/vocabulary"}},
};

struct Library {
    std::string_view header;              // the include begins with this
    std::vector<std::string_view> rooms;  // where it may be
    bool in_headers;                      // in .hpp files too; otherwise behind a small header of ours
};

const std::vector<Library> kLibraries{
    {"Eigen/", {"estimator/core", "estimator/outputs"}, true},
    {"toml", {"estimator/session"}, false},
    {"nlohmann/", {"estimator/outputs", "estimator/wall"}, false},
    {"boost/", {"estimator/wall"}, false},
    {"CLI/", {"estimator/holdfast.cpp", "firmware_host/node", "firmware_host/carnode.cpp"}, false},
    {"zmq", {"estimator/link"}, false},
    {"google/protobuf/", {"proto"}, false},
};

// The core has no I/O, no heap after construction, no exceptions, no clock, no threads.
const std::vector<std::string_view> kNotInCore{"chrono",        "condition_variable",
                                               "cstdio",        "ctime",
                                               "deque",         "exception",
                                               "filesystem",    "fstream",
                                               "functional",    "future",
                                               "iomanip",       "iostream",
                                               "istream",       "list",
                                               "locale",        "map",
                                               "memory",        "mutex",
                                               "ostream",       "random",
                                               "regex",         "set",
                                               "sstream",       "stdexcept",
                                               "stdio.h",       "string",
                                               "thread",        "time.h",
                                               "unordered_map", "unordered_set",
                                               "vector"};

bool lies_in(std::string_view path, std::string_view folder) {
    return path == folder || (path.starts_with(folder) && path.substr(folder.size()).starts_with('/'));
}

// The room with the longest matching name; nullptr outside all of them.
const Room* room_of(std::string_view path) {
    const Room* best = nullptr;
    for (const Room& room : kRooms)
        if (lies_in(path, room.folder) && (best == nullptr || room.folder.size() > best->folder.size()))
            best = &room;
    return best;
}

bool is_header(std::string_view path) {
    return path.ends_with(".hpp") || path.ends_with(".h");
}

std::string why_not_ours(const Room& room, std::string_view included, const Tree& tree) {
    const Room* target = room_of(included);
    if (target == nullptr || !tree.contains(std::string(included)))
        return "is no file of the project, named from the repository's root";
    if (target == &room) return {};
    for (std::string_view allowed : room.may_include)
        if (included == allowed || target->folder == allowed) return {};
    return "is not for " + std::string(room.folder);
}

std::string why_not_library(const Room& room, std::string_view file, std::string_view included) {
    if (room.folder == "estimator/core" &&
        std::find(kNotInCore.begin(), kNotInCore.end(), included) != kNotInCore.end())
        return "is not for the pure core";
    for (const Library& library : kLibraries) {
        if (!included.starts_with(library.header)) continue;
        if (std::find(library.rooms.begin(), library.rooms.end(), room.folder) == library.rooms.end())
            return "is not for " + std::string(room.folder);
        if (!library.in_headers && is_header(file)) return "stays behind a small header, in a .cpp file";
    }
    return {};
}

std::string why_not(const Room& room, std::string_view file, std::string_view included, bool quoted,
                    const Tree& tree) {
    if (included.ends_with(".pb.h"))
        return room.folder == "proto" && !is_header(file) ? "" : "is generated: only for proto/*.cpp";
    return quoted ? why_not_ours(room, included, tree) : why_not_library(room, file, included);
}

}  // namespace

Tree read_tree(const std::filesystem::path& root) {
    Tree tree;
    for (const char* folder : {"proto", "estimator", "firmware_host"}) {
        for (const auto& entry : std::filesystem::recursive_directory_iterator(root / folder)) {
            const auto extension = entry.path().extension();
            if (extension != ".cpp" && extension != ".hpp" && extension != ".h") continue;
            std::ifstream in(entry.path(), std::ios::binary);
            std::ostringstream text;
            text << in.rdbuf();
            tree[entry.path().lexically_relative(root).generic_string()] = text.str();
        }
    }
    return tree;
}

std::vector<std::string> breaches(const Tree& tree) {
    static const std::regex kInclude(R"re(^\s*#\s*include\s*([<"])([^>"]+)[>"])re");
    std::vector<std::string> found;
    for (const auto& [path, text] : tree) {
        const Room* room = room_of(path);
        if (room == nullptr) {
            found.push_back(path + ":1: lies in no folder that the rule knows");
            continue;
        }
        std::istringstream lines(text);
        std::string line;
        for (int number = 1; std::getline(lines, line); ++number) {
            std::smatch match;
            if (!std::regex_search(line, match, kInclude)) continue;
            const std::string included = match[2];
            const std::string why = why_not(*room, path, included, match[1] == "\"", tree);
            if (!why.empty())
                found.push_back(path + ":" + std::to_string(number) + ": " + included + " " + why);
        }
    }
    return found;
}

}  // namespace holdfast::structure
