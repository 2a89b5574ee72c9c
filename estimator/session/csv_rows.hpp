// SPDX-License-Identifier: MIT
// Rows and cells of a CSV file after RFC 4180: quoted cells, doubled quotes, line breaks within quotes, LF or
// CRLF, a byte-order mark at the start. Empty lines are passed over. Memory does not grow with the file.
#pragma once

#include <cstdint>
#include <memory>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "estimator/session/byte_source.hpp"

namespace holdfast::session {

class CsvRows {
  public:
    enum class Outcome : std::uint8_t { row, end, failed };

    explicit CsvRows(std::unique_ptr<ByteSource> bytes);

    [[nodiscard]] Outcome next();

    // Of the newest row; after `failed`, of what came of the row that broke. Valid until next().
    [[nodiscard]] std::span<const std::string_view> cells() const { return cells_; }
    [[nodiscard]] std::uint64_t line() const { return line_; }
    // False only for a last row that no line break ends: RFC 4180 allows it, and a file that was cut shows
    // it.
    [[nodiscard]] bool ended_by_break() const { return ended_by_break_; }
    [[nodiscard]] const std::string& failure() const { return failure_; }
    [[nodiscard]] double progress() const { return bytes_->progress(); }

  private:
    Outcome take_row();
    bool find_row_end();
    bool read_more();
    bool split(std::string_view row);
    bool split_quoted(std::string_view row);
    Outcome fail(std::string why);

    std::unique_ptr<ByteSource> bytes_;
    std::vector<char> buffer_;
    std::size_t begin_ = 0;  // unread text is [begin_, end_)
    std::size_t end_ = 0;
    std::size_t row_size_ = 0;  // of the row found at begin_, its line break left out
    std::uint64_t next_line_ = 1;
    std::uint64_t line_ = 0;
    bool ended_by_break_ = true;
    bool row_has_quotes_ = false;
    std::string unquoted_;  // text of a row's quoted cells
    std::vector<std::string_view> cells_;
    std::string failure_;
};

}  // namespace holdfast::session
