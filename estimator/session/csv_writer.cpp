// SPDX-License-Identifier: MIT
#include "estimator/session/csv_writer.hpp"

#include <array>
#include <charconv>
#include <utility>

#include "estimator/session/cell.hpp"
#include "estimator/session/units.hpp"

namespace holdfast::session {
namespace {

constexpr std::size_t kFlushBytes = std::size_t{64} * 1024;

std::string column_name(Channel channel, const StreamInfo& stream) {
    const bool is_angle = channel == Channel::flap_angle;
    return channel_name(is_angle ? Channel::flap_position : channel, stream.ride_height_names);
}

// RFC 4180: a cell with a comma, a quote or a line break is quoted, its quotes doubled.
std::string csv_cell(const std::string& text) {
    if (text.find_first_of(",\"\r\n") == std::string::npos) return text;
    std::string cell = "\"";
    for (const char c : text) cell += c == '"' ? "\"\"" : std::string(1, c);
    return cell + "\"";
}

void append_number(std::string& text, double value) {
    std::array<char, 32> digits{};
    const auto written = std::to_chars(digits.data(), digits.data() + digits.size(), value);
    text.append(digits.data(), written.ptr);
}

}  // namespace

Result<CsvWriter> CsvWriter::create(const std::string& path, const StreamInfo& stream) {
    Result<std::unique_ptr<ByteSink>> sink = ByteSink::create(path);
    if (!sink) return sink.errors();
    return CsvWriter(path, std::move(*sink), stream);
}

CsvWriter::CsvWriter(std::string path, std::unique_ptr<ByteSink> sink, const StreamInfo& stream)
    : path_(std::move(path)), sink_(std::move(sink)), announced_(stream.channels) {
    text_ = "t[s]";
    for (std::size_t i = 0; i < index(Channel::ride_height_0) + stream.ride_height_names.size(); ++i) {
        if (((announced_ >> i) & 1U) == 0) continue;
        const auto channel = static_cast<Channel>(i);
        columns_.push_back(channel);
        text_ +=
            "," + csv_cell(column_name(channel, stream) + "[" + std::string(info(channel).si_unit) + "]");
    }
    text_ += '\n';
}

std::optional<Error> CsvWriter::write(const Frame& frame) {
    if ((frame.present & ~announced_) != 0) {
        return Error{
            .file = path_,
            .message = "the frame at " + time_text_s(frame.time_ns) +
                       " s carries a channel that its stream did not announce; expected none but those"};
    }
    text_ += time_text_s(frame.time_ns);
    for (const Channel channel : columns_) {
        text_ += ',';
        if (frame.has(channel)) append_number(text_, frame.get(channel));
    }
    text_ += '\n';
    return text_.size() < kFlushBytes ? std::nullopt : flush();
}

std::optional<Error> CsvWriter::flush() {
    std::optional<Error> error = sink_->write(text_);
    text_.clear();
    return error;
}

std::optional<Error> CsvWriter::finish() {
    if (std::optional<Error> error = flush()) return error;
    return sink_->finish();
}

}  // namespace holdfast::session
