// SPDX-License-Identifier: MIT
// A text file that holds whole lines at every moment, however the program ends.
#pragma once

#include <cstdint>
#include <filesystem>
#include <string>
#include <string_view>

namespace holdfast::outputs {

class LineFile {
  public:
    enum class Flush : std::uint8_t { each_line, by_block };

    // Creates or empties the file. Throws std::runtime_error that names the file and the system's reason.
    LineFile(std::filesystem::path path, Flush flush);
    ~LineFile();
    LineFile(const LineFile&) = delete;
    LineFile& operator=(const LineFile&) = delete;

    // Adds one line (its line end included). Only whole lines are handed to the system.
    void add(std::string_view line);
    // Writes what is still held back; throws as the constructor does.
    void flush();

  private:
    std::filesystem::path path_;
    Flush flush_;
    int descriptor_ = -1;
    std::string held_;
};

// Replaces the file as a whole: a reader sees the old text or the new, never a part.
void write_whole(const std::filesystem::path& path, std::string_view text);

}  // namespace holdfast::outputs
