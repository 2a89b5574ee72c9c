// SPDX-License-Identifier: MIT
#include <filesystem>
#include <iostream>
#include <memory>
#include <utility>

#include "estimator/commands/commands.hpp"
#include "estimator/commands/open.hpp"
#include "estimator/session/csv_writer.hpp"
#include "estimator/session/interrupt.hpp"
#include "proto/recording.hpp"
#include "proto/vocabulary/exit_status.hpp"

namespace holdfast::commands {
namespace {

// Either form, behind the two calls that convert needs. Set: why it could not be written.
class LogWriter {
  public:
    virtual ~LogWriter() = default;
    [[nodiscard]] virtual std::optional<std::string> write(const Frame& frame) = 0;
    [[nodiscard]] virtual std::optional<std::string> finish(bool complete) = 0;
};

template <class Error>
std::optional<std::string> in_words(const std::optional<Error>& error) {
    if (!error) return std::nullopt;
    return to_string(*error);
}

class CsvLogWriter final : public LogWriter {
  public:
    explicit CsvLogWriter(session::CsvWriter writer) : writer_(std::move(writer)) {}
    std::optional<std::string> write(const Frame& frame) override { return in_words(writer_.write(frame)); }
    std::optional<std::string> finish(bool) override { return in_words(writer_.finish()); }

  private:
    session::CsvWriter writer_;
};

class RecordingLogWriter final : public LogWriter {
  public:
    explicit RecordingLogWriter(proto::RecordingWriter writer) : writer_(std::move(writer)) {}
    std::optional<std::string> write(const Frame& frame) override { return in_words(writer_.write(frame)); }
    std::optional<std::string> finish(bool complete) override { return in_words(writer_.finish(complete)); }

  private:
    proto::RecordingWriter writer_;
};

int fail(const std::string& message) {
    std::cerr << "error: " << message << '\n';
    return kFailed;
}

// The writer for a name, or nullptr: why has been told on standard error.
std::unique_ptr<LogWriter> create(const std::string& path, const StreamInfo& info) {
    if (path.ends_with(".hfr")) {
        auto recording = proto::RecordingWriter::create(path, info);
        if (recording) return std::make_unique<RecordingLogWriter>(std::move(*recording));
        fail(to_string(recording.error()));
        return nullptr;
    }
    auto csv = session::CsvWriter::create(path, info);
    if (csv) return std::make_unique<CsvLogWriter>(std::move(*csv));
    fail(session::to_string(csv.errors()));
    return nullptr;
}

bool has_known_ending(const std::string& path) {
    for (const char* ending : {".hfr", ".csv", ".csv.gz", ".csv.zst"})
        if (path.ends_with(ending)) return true;
    return false;
}

bool same_file(const std::string& one, const std::string& other) {
    std::error_code no_such_file;
    return std::filesystem::equivalent(one, other, no_such_file);
}

}  // namespace

int convert(const ConvertOptions& options) {
    if (!has_known_ending(options.out)) {
        fail(options.out +
             ": the name must end in .hfr, .csv, .csv.gz or .csv.zst, which says what to write");
        return kWrongUse;
    }
    if (same_file(options.in, options.out)) {
        fail(options.out + " is the log to be read; it cannot be written over while it is");
        return kWrongUse;
    }
    const auto source = open(options.in, options.channels, options.strict);
    if (source == nullptr) return kFailed;
    const auto writer = create(options.out, source->info());
    if (writer == nullptr) return kFailed;

    session::note_interrupts();
    Frame frame;
    while (!session::interrupted() && source->next(frame))
        if (const auto error = writer->write(frame)) return fail(*error);
    const bool complete = !session::interrupted() && !source->error();
    if (const auto error = writer->finish(complete)) return fail(*error);
    if (complete) return kDone;
    std::cerr << "error: "
              << (session::interrupted() ? session::interrupt_reason() : session::to_string(*source->error()))
              << '\n'
              << options.out << " holds what was read until then\n";
    return kIncomplete;
}

}  // namespace holdfast::commands
