// SPDX-License-Identifier: MIT
#include "estimator/session/channel_map.hpp"

#include <cmath>
#include <utility>

#include "estimator/session/toml_file.hpp"

namespace holdfast::session {
namespace {

constexpr std::string_view kShape =
    "channel = { column = \"...\", unit = \"...\", scale = 1.0, offset = 0.0 }";

class MapReader {
  public:
    explicit MapReader(const std::string& path) { map_.file = path; }

    void take(const TomlEntry& entry) {
        if (entry.path.front() != "channels" || (entry.path.size() == 1 && !entry.is_table())) {
            complain(entry, "not known here; expected a table [channels]");
        } else if (entry.path.size() == 2) {
            start_channel(entry);
        } else if (entry.path.size() == 3 && in_channel_) {
            set_field(entry);
        }
    }

    Result<ChannelMap> finish() {
        finish_channel();
        if (!errors_.empty()) return std::move(errors_);
        return std::move(map_);
    }

  private:
    void complain(const TomlEntry& entry, std::string message) {
        errors_.push_back({map_.file, entry.line, 0, entry.key(), std::move(message)});
    }

    void start_channel(const TomlEntry& entry) {
        finish_channel();
        in_channel_ = false;
        const std::string& name = entry.path[1];
        if (!is_channel_name(name)) {
            complain(entry, "no channel of this name; expected t, speed, ... or ride_height_NAME");
        } else if (!entry.is_table()) {
            complain(entry, "found " + describe(entry) + "; expected " + std::string(kShape));
        } else {
            in_channel_ = true;
            current_ = {.channel = name, .column = {}, .unit = {}, .to_unit = {}, .line = entry.line};
        }
    }

    void set_field(const TomlEntry& entry) {
        const std::string& field = entry.path[2];
        if (field == "column") {
            if (entry.text() == nullptr)
                return complain(entry, "found " + describe(entry) + "; expected a text");
            current_.column = *entry.text();
        } else if (field == "unit") {
            const bool known = entry.text() != nullptr && accepts(current_.channel, *entry.text());
            if (!known) {
                return complain(entry, "found " + describe(entry) + "; expected one of " +
                                           accepted_units(current_.channel));
            }
            current_.unit = *entry.text();
        } else if (field == "scale" || field == "offset") {
            const bool is_scale = field == "scale";
            const double* number = entry.number();
            if (number == nullptr || !std::isfinite(*number) || (is_scale && *number == 0.0)) {
                return complain(entry, "found " + describe(entry) + "; expected a finite number" +
                                           (is_scale ? " other than 0" : ""));
            }
            (is_scale ? current_.to_unit.scale : current_.to_unit.offset) = *number;
        } else {
            complain(entry, "not known here; expected " + std::string(kShape));
        }
    }

    void finish_channel() {
        if (!in_channel_) return;
        if (current_.column.empty()) {
            errors_.push_back({map_.file, current_.line, 0, "channels." + current_.channel + ".column",
                               "missing or empty; expected the name of the log's column"});
        }
        map_.channels.push_back(current_);
    }

    static bool accepts(const std::string& channel, const std::string& unit) {
        return channel == kTimeName ? time_exponent(unit).has_value() : find_unit(channel, unit).has_value();
    }

    ChannelMap map_;
    MappedChannel current_;
    bool in_channel_ = false;
    Errors errors_;
};

}  // namespace

Result<ChannelMap> read_channel_map(const std::string& path) {
    const Result<std::vector<TomlEntry>> entries = read_toml_file(path);
    if (!entries) return entries.errors();
    MapReader reader(path);
    for (const TomlEntry& entry : *entries) reader.take(entry);
    return reader.finish();
}

}  // namespace holdfast::session
