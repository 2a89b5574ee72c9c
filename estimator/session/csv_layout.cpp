// SPDX-License-Identifier: MIT
#include "estimator/session/csv_layout.hpp"

#include <algorithm>
#include <optional>
#include <utility>

#include "estimator/session/cell.hpp"
#include "estimator/session/needed_channels.hpp"

namespace holdfast::session {
namespace {

struct HeaderCell {
    std::string_view text;
    std::string_view name;
    std::optional<std::string_view> unit;
};

HeaderCell split_header_cell(std::string_view cell) {
    const std::string_view text = trimmed(cell);
    const std::size_t bracket = text.rfind('[');
    if (bracket == std::string_view::npos || !text.ends_with(']')) return {text, text, std::nullopt};
    return {text, trimmed(text.substr(0, bracket)),
            trimmed(text.substr(bracket + 1, text.size() - bracket - 2))};
}

class LayoutReader {
  public:
    LayoutReader(const std::string& file, std::uint64_t line, std::span<const std::string_view> header,
                 const ChannelMap& map)
        : file_(file), line_(line), map_(map) {
        for (const std::string_view cell : header) cells_.push_back(split_header_cell(cell));
        layout_.header.assign(header.begin(), header.end());
        layout_.info.origin = file;
    }

    Result<CsvLayout> read() {
        find_duplicates();
        for (const MappedChannel& mapped : map_.channels) take_mapped(mapped);
        for (std::size_t cell = 0; cell < cells_.size(); ++cell) take_by_name(cell);
        find_missing();
        if (!errors_.empty()) return std::move(errors_);
        std::sort(layout_.columns.begin(), layout_.columns.end(),
                  [](const CsvColumn& a, const CsvColumn& b) { return a.cell < b.cell; });
        list_left_out();
        return std::move(layout_);
    }

  private:
    void complain(std::size_t cell, std::string message) {
        errors_.push_back({file_, line_, cell + 1, layout_.header[cell], std::move(message)});
    }

    void find_duplicates() {
        for (std::size_t later = 0; later < cells_.size(); ++later) {
            for (std::size_t earlier = 0; earlier < later; ++earlier) {
                if (cells_[later].name.empty() || cells_[later].name != cells_[earlier].name) continue;
                complain(later, "the header names " + in_quotes(cells_[later].name) +
                                    " twice (also in column " + std::to_string(earlier + 1) +
                                    "); expected each name once");
                break;
            }
        }
    }

    void take_mapped(const MappedChannel& mapped) {
        claimed_.push_back(mapped.channel);
        const auto complain_of_key = [&](std::string message) {
            errors_.push_back({map_.file, mapped.line, 0, "channels." + mapped.channel, std::move(message)});
        };
        const auto named = [&](auto part) {
            return std::find_if(cells_.begin(), cells_.end(),
                                [&](const HeaderCell& c) { return c.*part == mapped.column; });
        };
        auto found = named(&HeaderCell::text);
        if (found == cells_.end()) found = named(&HeaderCell::name);
        if (found == cells_.end()) {
            return complain_of_key("no column " + in_quotes(mapped.column) + " in " + file_ +
                                   "; expected one of " + joined(layout_.header));
        }
        const auto cell = static_cast<std::size_t>(found - cells_.begin());
        const std::optional<std::string_view> unit = mapped.unit ? mapped.unit : found->unit;
        if (!unit) {
            return complain_of_key("no unit, and column " + in_quotes(mapped.column) + " of " + file_ +
                                   " names none; expected unit = one of " + accepted_units(mapped.channel));
        }
        if (!take(cell, mapped.channel, *unit, mapped.to_unit)) {
            complain_of_key("unit " + in_quotes(*unit) + " is not known for it; expected one of " +
                            accepted_units(mapped.channel));
        }
    }

    void take_by_name(std::size_t cell) {
        const HeaderCell& header = cells_[cell];
        const bool is_mapped = std::any_of(map_.channels.begin(), map_.channels.end(),
                                           [&](const MappedChannel& m) { return m.channel == header.name; });
        if (is_mapped || !is_channel_name(header.name)) return;
        claimed_.emplace_back(header.name);
        if (!header.unit) {
            complain(cell, "no unit; expected name[unit], the unit one of " + accepted_units(header.name));
        } else if (!take(cell, header.name, *header.unit, {})) {
            complain(cell, "unit " + in_quotes(*header.unit) + " is not known for it; expected one of " +
                               accepted_units(header.name));
        }
    }

    // False: the channel does not accept the unit.
    bool take(std::size_t cell, std::string_view channel_name, std::string_view unit, const Linear& to_unit) {
        taken_.push_back(cell);
        if (channel_name == kTimeName) {
            const std::optional<int> exponent = time_exponent(unit);
            layout_.time_cell = cell;
            layout_.time_exponent = exponent.value_or(0);
            layout_.time_to_unit = to_unit;
            layout_.time_mapped = to_unit.scale != 1.0 || to_unit.offset != 0.0;
            return exponent.has_value();
        }
        std::optional<ChannelUnit> known = find_unit(channel_name, unit);
        if (!known) return false;
        if (is_ride_height(known->channel)) {
            std::vector<std::string>& names = layout_.info.ride_height_names;
            if (names.size() == kMaxRideHeights) {
                complain(cell, "one ride height too many; expected " + std::to_string(kMaxRideHeights) +
                                   " at most");
                return true;
            }
            known->channel = ride_height_channel(names.size());
            names.emplace_back(channel_name.substr(kRideHeightPrefix.size()));
        }
        layout_.info.channels |= std::uint64_t{1} << index(known->channel);
        layout_.columns.push_back({cell, known->channel, compose(to_unit, known->to_si)});
        return true;
    }

    void find_missing() {
        std::vector<std::string> missing;
        const auto need = [&](std::string_view name) {
            if (std::find(claimed_.begin(), claimed_.end(), name) == claimed_.end())
                missing.emplace_back(name);
        };
        need(kTimeName);
        for (const Channel channel : kNeededChannels) need(info(channel).name);
        const bool has_ride_height =
            std::any_of(claimed_.begin(), claimed_.end(),
                        [](const std::string& name) { return name.starts_with(kRideHeightPrefix); });
        if (!has_ride_height) missing.emplace_back("ride_height_* (one for each axle)");
        if (missing.empty()) return;
        std::string message = "needed but not in the header: " + joined(missing) +
                              "; expected each as name[unit], or under another name with --channels";
        if (cells_.size() == 1)
            message += "; the header is a single cell: are the cells separated by commas?";
        errors_.push_back({file_, line_, 0, "", std::move(message)});
    }

    void list_left_out() {
        for (std::size_t cell = 0; cell < cells_.size(); ++cell) {
            if (std::find(taken_.begin(), taken_.end(), cell) != taken_.end()) continue;
            layout_.left_out.push_back(cells_[cell].text.empty()
                                           ? "column " + std::to_string(cell + 1) + " (no name)"
                                           : std::string(cells_[cell].text));
        }
    }

    const std::string& file_;
    std::uint64_t line_;
    const ChannelMap& map_;
    std::vector<HeaderCell> cells_;
    std::vector<std::size_t> taken_;    // cells that are a channel
    std::vector<std::string> claimed_;  // channels that have a cell, even one with an error of its own
    CsvLayout layout_;
    Errors errors_;
};

}  // namespace

Result<CsvLayout> read_csv_layout(const std::string& file, std::uint64_t line,
                                  std::span<const std::string_view> header, const ChannelMap& map) {
    return LayoutReader(file, line, header, map).read();
}

}  // namespace holdfast::session
