// SPDX-License-Identifier: MIT
#include "estimator/session/csv_rows.hpp"

#include <algorithm>
#include <cstring>
#include <utility>

namespace holdfast::session {
namespace {

constexpr std::size_t kBufferBytes = std::size_t{256} * 1024;
constexpr std::size_t kLongestRow =
    std::size_t{4} * 1024 * 1024;  // a longer one is a quote that is never closed
constexpr std::string_view kByteOrderMark = "\xef\xbb\xbf";

std::size_t count(std::string_view text, char c) {
    return static_cast<std::size_t>(std::count(text.begin(), text.end(), c));
}

}  // namespace

CsvRows::CsvRows(std::unique_ptr<ByteSource> bytes) : bytes_(std::move(bytes)), buffer_(kBufferBytes) {
    read_more();
    if (std::string_view(buffer_.data(), end_).starts_with(kByteOrderMark)) begin_ = kByteOrderMark.size();
}

CsvRows::Outcome CsvRows::next() {
    Outcome outcome = Outcome::row;
    do {
        outcome = take_row();
    } while (outcome == Outcome::row && cells_.size() == 1 && cells_[0].empty() && !row_has_quotes_);
    return outcome;
}

CsvRows::Outcome CsvRows::take_row() {
    cells_.clear();
    line_ = next_line_;
    ended_by_break_ = find_row_end();
    std::string_view row(buffer_.data() + begin_, row_size_);
    if (!ended_by_break_) {
        if (row.empty() && !bytes_->failure()) return Outcome::end;
        if (row.size() > kLongestRow) {
            return fail("the row is longer than 4 MiB; expected a line break (is a quote not closed?)");
        }
    }
    begin_ += row_size_ + (ended_by_break_ ? 1 : 0);
    next_line_ += 1 + (row_has_quotes_ ? count(row, '\n') : 0);
    if (row.ends_with('\r')) row.remove_suffix(1);
    const bool well_quoted = row_has_quotes_ ? split_quoted(row) : split(row);
    if (!ended_by_break_ && bytes_->failure()) return fail(*bytes_->failure());
    if (!well_quoted) {
        return fail(ended_by_break_
                        ? "a quote in the wrong place; expected a quoted cell to be quoted as a whole, "
                          "with quotes inside it doubled"
                        : "the file ends within a quoted cell; expected its closing quote");
    }
    return Outcome::row;
}

CsvRows::Outcome CsvRows::fail(std::string why) {
    failure_ = std::move(why);
    return Outcome::failed;
}

// Sets row_size_ to the text before the line break that ends the row (a break within quotes does not). False:
// the text ends, or the row is too long, before one was found; row_size_ is then all there is.
bool CsvRows::find_row_end() {
    std::size_t searched = 0;
    std::size_t quotes = 0;
    row_has_quotes_ = false;
    for (;;) {
        const std::string_view fresh(buffer_.data() + begin_ + searched, end_ - begin_ - searched);
        const std::size_t line_break = fresh.find('\n');
        const std::string_view part = fresh.substr(0, line_break);
        if (part.find('"') != std::string_view::npos) quotes += count(part, '"');
        row_has_quotes_ = quotes > 0;
        searched += part.size();
        row_size_ = searched;
        if (line_break != std::string_view::npos) {
            if (quotes % 2 == 0) return true;
            ++searched;  // the break is text of a quoted cell
        } else if (row_size_ > kLongestRow || !read_more()) {
            return false;
        }
    }
}

// Moves the unread text to the buffer's start, doubles the buffer if that leaves no room, and fills it up.
bool CsvRows::read_more() {
    std::memmove(buffer_.data(), buffer_.data() + begin_, end_ - begin_);
    end_ -= begin_;
    begin_ = 0;
    if (end_ == buffer_.size()) buffer_.resize(2 * buffer_.size());
    const std::size_t got = bytes_->read(std::span(buffer_).subspan(end_));
    end_ += got;
    return got > 0;
}

bool CsvRows::split(std::string_view row) {
    const char* cell = row.data();
    const char* const end = cell + row.size();
    for (const char* c = cell; c != end; ++c) {
        if (*c == ',') {
            cells_.emplace_back(cell, static_cast<std::size_t>(c - cell));
            cell = c + 1;
        }
    }
    cells_.emplace_back(cell, static_cast<std::size_t>(end - cell));
    return true;
}

bool CsvRows::split_quoted(std::string_view row) {
    unquoted_.clear();
    unquoted_.reserve(row.size());  // so that the cells' views into it stay good
    std::size_t at = 0;
    for (;;) {
        if (at < row.size() && row[at] == '"') {
            const std::size_t start = unquoted_.size();
            for (++at;; ++at) {
                const std::size_t quote = row.find('"', at);
                unquoted_ += row.substr(at, quote - at);
                if (quote == std::string_view::npos) return false;
                at = quote + 1;
                if (at >= row.size() || row[at] != '"') break;
                unquoted_ += '"';
            }
            cells_.emplace_back(unquoted_.data() + start, unquoted_.size() - start);
        } else {
            const std::string_view cell = row.substr(at, row.find(',', at) - at);
            if (cell.find('"') != std::string_view::npos) return false;
            cells_.push_back(cell);
            at += cell.size();
        }
        if (at == row.size()) return true;
        if (row[at] != ',') return false;
        ++at;
    }
}

}  // namespace holdfast::session
