// SPDX-License-Identifier: MIT
// Reads a CSV log, row by row, in memory that does not grow with it.
//
// An empty cell is no sample. A number that is not finite, and a time that repeats, are delivered as they
// are: the engine counts them (LogOptions::strict makes them errors). Errors, each with file, line, column
// and what was expected: text where a number belongs, time missing or running backwards, too few or too many
// cells, a quote out of place, packed data that are damaged, and a file cut in the middle of a row. A last
// row that has all its cells but no line break is taken as whole, as RFC 4180 allows: a cut within its last
// number cannot be told.
#pragma once

#include <memory>

#include "estimator/session/byte_source.hpp"
#include "estimator/session/csv_layout.hpp"
#include "estimator/session/csv_rows.hpp"
#include "estimator/session/log_source.hpp"

namespace holdfast::session {

class CsvLog final : public LogSource {
  public:
    [[nodiscard]] static Result<std::unique_ptr<LogSource>> open(const std::string& path,
                                                                 std::unique_ptr<ByteSource> bytes,
                                                                 const LogOptions& options);

    [[nodiscard]] const StreamInfo& info() const override { return layout_.info; }
    [[nodiscard]] bool next(Frame& frame) override;
    [[nodiscard]] const std::optional<Error>& error() const override { return error_; }
    [[nodiscard]] const std::vector<std::string>& left_out() const override { return layout_.left_out; }
    [[nodiscard]] double progress() const override { return rows_.progress(); }

  private:
    CsvLog(CsvRows rows, CsvLayout layout, bool strict);
    bool read_time(std::string_view cell, Frame& frame);
    bool read_cell(const CsvColumn& column, std::string_view cell, Frame& frame);
    bool fail(std::size_t cell, std::string message);
    bool fail_at_cell(std::size_t cell, std::string_view found, std::string_view expected);

    CsvRows rows_;
    CsvLayout layout_;
    bool strict_;
    bool has_time_ = false;
    std::int64_t last_time_ns_ = 0;
    std::optional<Error> error_;
};

}  // namespace holdfast::session
