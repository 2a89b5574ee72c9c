// SPDX-License-Identifier: MIT
// The page's files as they lie in the program (embed.cmake puts them there).
#pragma once

#include <span>
#include <string_view>

namespace holdfast::wall {

struct PageFile {
    std::string_view name;  // index.html, style.css, ...
    std::string_view type;  // media type
    std::string_view content;
};

[[nodiscard]] std::span<const PageFile> page_files();

// The file of this name, or nullptr.
[[nodiscard]] inline const PageFile* find(std::span<const PageFile> files, std::string_view name) {
    for (const PageFile& file : files)
        if (file.name == name) return &file;
    return nullptr;
}

}  // namespace holdfast::wall
