// SPDX-License-Identifier: MIT
#include "estimator/session/csv_log.hpp"

#include <cmath>
#include <utility>

#include "estimator/session/cell.hpp"

namespace holdfast::session {

Result<std::unique_ptr<LogSource>> CsvLog::open(const std::string& path, std::unique_ptr<ByteSource> bytes,
                                                const LogOptions& options) {
    CsvRows rows(std::move(bytes));
    switch (rows.next()) {
        case CsvRows::Outcome::end:
            return Error{.file = path,
                         .message = "the file is empty; expected a header line of name[unit] cells"};
        case CsvRows::Outcome::failed:
            return Error{
                .file = path, .line = rows.line(), .column = rows.cells().size(), .message = rows.failure()};
        case CsvRows::Outcome::row:
            break;
    }
    Result<CsvLayout> layout = read_csv_layout(path, rows.line(), rows.cells(), options.channels);
    if (!layout) return layout.errors();
    return std::unique_ptr<LogSource>(new CsvLog(std::move(rows), std::move(*layout), options.strict));
}

CsvLog::CsvLog(CsvRows rows, CsvLayout layout, bool strict)
    : rows_(std::move(rows)), layout_(std::move(layout)), strict_(strict) {}

bool CsvLog::next(Frame& frame) {
    if (error_) return false;
    const CsvRows::Outcome outcome = rows_.next();
    if (outcome == CsvRows::Outcome::end) return false;
    const auto cells = rows_.cells();
    const std::size_t expected = layout_.header.size();
    if (outcome == CsvRows::Outcome::failed)
        return fail(cells.empty() ? 0 : cells.size() - 1, rows_.failure());
    if (cells.size() < expected) {
        return fail(cells.size() - 1, std::string(rows_.ended_by_break() ? "the row" : "the file") +
                                          " ends after " + std::to_string(cells.size()) +
                                          " cells of this row; expected " + std::to_string(expected) +
                                          ", as in the header");
    }
    if (cells.size() > expected) {
        return fail(expected, "the row has " + std::to_string(cells.size()) + " cells; expected " +
                                  std::to_string(expected) + ", as in the header");
    }
    frame.present = 0;
    if (!read_time(cells[layout_.time_cell], frame)) return false;
    for (const CsvColumn& column : layout_.columns) {
        if (!read_cell(column, cells[column.cell], frame)) return false;
    }
    return true;
}

bool CsvLog::read_time(std::string_view cell, Frame& frame) {
    const std::size_t at = layout_.time_cell;
    const TimeCell time = layout_.time_mapped
                              ? parse_mapped_time(cell, layout_.time_to_unit, layout_.time_exponent)
                              : parse_time(cell, layout_.time_exponent);
    if (time.status == TimeCell::Status::not_a_number) {
        if (cell == layout_.header[at])
            return fail(at, "the header stands here again; expected a row of numbers");
        return fail_at_cell(at, cell, "a number: every row has a time");
    }
    if (time.status == TimeCell::Status::out_of_range) {
        return fail_at_cell(at, cell, "a finite time of less than 292 years");
    }
    if (has_time_ && time.time_ns < last_time_ns_) {
        return fail_at_cell(
            at, cell,
            "a time after " + time_text_s(last_time_ns_) + " s, the row before: time runs backwards here");
    }
    if (strict_ && has_time_ && time.time_ns == last_time_ns_) {
        return fail_at_cell(at, cell, "a time after that of the row before, not a repeat (--strict)");
    }
    has_time_ = true;
    last_time_ns_ = time.time_ns;
    frame.time_ns = time.time_ns;
    return true;
}

bool CsvLog::read_cell(const CsvColumn& column, std::string_view cell, Frame& frame) {
    if (cell.empty()) return true;
    const std::optional<double> number = parse_number(cell);
    if (!number) return trimmed(cell).empty() || fail_at_cell(column.cell, cell, "a number or an empty cell");
    if (strict_ && !std::isfinite(*number))
        return fail_at_cell(column.cell, cell, "a finite number (--strict)");
    frame.set(column.channel, column.to_si(*number));
    return true;
}

bool CsvLog::fail_at_cell(std::size_t cell, std::string_view found, std::string_view expected) {
    const bool may_be_cut = !rows_.ended_by_break() && cell + 1 == layout_.header.size();
    return fail(cell, "found " + in_quotes(found) + "; expected " + std::string(expected) +
                          (may_be_cut ? "; the file ends here, in the middle of a row" : ""));
}

bool CsvLog::fail(std::size_t cell, std::string message) {
    const std::string name = cell < layout_.header.size() ? layout_.header[cell] : "";
    error_ = Error{layout_.info.origin, rows_.line(), cell + 1, name, std::move(message)};
    return false;
}

}  // namespace holdfast::session
